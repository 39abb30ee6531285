import type { PathEncounter } from '../../src/probability/encounter-path.js';
import type { Matrix3, Vector3 } from '../../src/vector.js';
import { circular, twoBody } from './two-body.js';

export const TCA_MS = Date.UTC(2027, 2, 4, 5, 6, 7);

export function diagonal(sigmaRtnM: Vector3): Matrix3 {
  return [
    [sigmaRtnM[0] ** 2, 0, 0],
    [0, sigmaRtnM[1] ** 2, 0],
    [0, 0, sigmaRtnM[2] ** 2],
  ];
}

/**
 * Two-body motion of an object on a circular orbit of 7000 km radius and of another that at `TCA_MS` has this
 * relative position and velocity, radial, transverse and normal.
 */
export function encounterOf(
  offsetM: Vector3,
  velocityMPerS: Vector3,
  sigma1RtnM: Vector3,
  sigma2RtnM: Vector3,
  hardBodyRadiusM: number,
  halfWindowMin: number,
): PathEncounter {
  const state1 = circular(7000);
  const add = (a: Vector3, b: Vector3): Vector3 => [
    a[0] + b[0] / 1000,
    a[1] + b[1] / 1000,
    a[2] + b[2] / 1000,
  ];
  const state2 = {
    positionKm: add(state1.positionKm, offsetM),
    velocityKmPerS: add(state1.velocityKmPerS, velocityMPerS),
  };
  const motion1 = twoBody(state1);
  const motion2 = twoBody(state2);
  return {
    statesAt: (timeMs) => {
      const seconds = (timeMs - TCA_MS) / 1000;
      return { object1: motion1(seconds), object2: motion2(seconds) };
    },
    fromMs: TCA_MS - halfWindowMin * 60_000,
    tcaMs: TCA_MS,
    toMs: TCA_MS + halfWindowMin * 60_000,
    covariance1RtnM2: diagonal(sigma1RtnM),
    covariance2RtnM2: diagonal(sigma2RtnM),
    hardBodyRadiusM,
  };
}
