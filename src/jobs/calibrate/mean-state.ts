import { checkForDecay, type SatRec, sgp4 } from 'satellite.js';
import { EARTH_RADIUS_KM } from '../../elements/orbit.js';

/** Values in one state: position (km), velocity (km/s), mean semi-major axis (km), unit normal of the mean orbit plane. */
export const MEAN_STATE_SIZE = 10;

/**
 * SGP4 state with the mean orbit that belongs to it: what a maneuver changes for good shows in the mean
 * semi-major axis and the mean plane, free of the periodic terms.
 *
 * @param out takes `MEAN_STATE_SIZE` values from `offset` on, TEME
 * @returns false when SGP4 gives no state
 */
export function meanStateAt(record: SatRec, minutes: number, out: Float64Array, offset: number): boolean {
  const state = sgp4(record, minutes);
  if (state === null || checkForDecay(record)) return false;
  const { position, velocity, meanElements } = state;
  out[offset] = position.x;
  out[offset + 1] = position.y;
  out[offset + 2] = position.z;
  out[offset + 3] = velocity.x;
  out[offset + 4] = velocity.y;
  out[offset + 5] = velocity.z;
  out[offset + 6] = meanElements.am * EARTH_RADIUS_KM;
  const sine = Math.sin(meanElements.im);
  out[offset + 7] = sine * Math.sin(meanElements.Om);
  out[offset + 8] = -sine * Math.cos(meanElements.Om);
  out[offset + 9] = Math.cos(meanElements.im);
  let sum = 0;
  for (let i = offset; i < offset + MEAN_STATE_SIZE; i++) sum += out[i];
  return Number.isFinite(sum);
}
