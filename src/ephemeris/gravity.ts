import { EARTH_MU_KM3_PER_S2, EARTH_RADIUS_KM } from '../elements/orbit.js';

/** Constants of WGS-72, which SGP4 works in (Hoots and Roehrich, Spacetrack Report #3, 1980; Vallado et al. 2006). */
export { EARTH_MU_KM3_PER_S2, EARTH_RADIUS_KM };
export const EARTH_J2 = 0.001_082_616;

const OBLATENESS = 1.5 * EARTH_J2 * EARTH_RADIUS_KM * EARTH_RADIUS_KM * EARTH_MU_KM3_PER_S2;

/**
 * Acceleration and its time derivative under a point mass with J2, from one state.
 * The gradient of U = mu/r - (3/2) J2 mu Re^2/r^3 (z^2/r^2 - 1/3), and that gradient differentiated along
 * the velocity.
 *
 * @param state x, y, z in km and vx, vy, vz in km/s from `offset` on, z along the Earth's pole (TEME)
 * @param out ax, ay, az in km/s^2 and jx, jy, jz in km/s^3 from index 0 on
 */
export function gravityAlong(state: Float64Array, offset: number, out: Float64Array): void {
  const x = state[offset];
  const y = state[offset + 1];
  const z = state[offset + 2];
  const vx = state[offset + 3];
  const vy = state[offset + 4];
  const vz = state[offset + 5];
  const perR2 = 1 / (x * x + y * y + z * z);
  const perR3 = perR2 * Math.sqrt(perR2);
  const perR5 = perR3 * perR2;
  const perR7 = perR5 * perR2;
  const rDotV = x * vx + y * vy + z * vz;
  const z2 = z * z;
  const central = -EARTH_MU_KM3_PER_S2 * perR3 - OBLATENESS * (perR5 - 5 * z2 * perR7);
  const centralRate =
    3 * EARTH_MU_KM3_PER_S2 * rDotV * perR5 -
    OBLATENESS * perR7 * (-5 * rDotV - 10 * z * vz + 35 * z2 * rDotV * perR2);
  out[0] = central * x;
  out[1] = central * y;
  out[2] = central * z - 2 * OBLATENESS * z * perR5;
  out[3] = central * vx + centralRate * x;
  out[4] = central * vy + centralRate * y;
  out[5] = central * vz + centralRate * z - OBLATENESS * perR5 * (2 * vz - 10 * z * rDotV * perR2);
}
