import type { Vector3 } from '../vector.js';

/** Position and velocity of one object at one time; the holder says the frame (TEME unless it says otherwise). */
export type OrbitState = {
  readonly positionKm: Vector3;
  readonly velocityKmPerS: Vector3;
};
