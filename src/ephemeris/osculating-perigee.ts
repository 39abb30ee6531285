import { EARTH_MU_KM3_PER_S2 } from './gravity.js';

/**
 * Perigee distance of the two-body orbit through one state, from the Earth's center, km.
 *
 * @param states x, y, z (km) and vx, vy, vz (km/s), from `at` on
 */
export function osculatingPerigeeKm(states: Float64Array, at: number): number {
  const x = states[at];
  const y = states[at + 1];
  const z = states[at + 2];
  const vx = states[at + 3];
  const vy = states[at + 4];
  const vz = states[at + 5];
  const r = Math.sqrt(x * x + y * y + z * z);
  const v2 = vx * vx + vy * vy + vz * vz;
  const rDotV = x * vx + y * vy + z * vz;
  const momentum2 = r * r * v2 - rDotV * rDotV;
  const semiLatusRectumKm = momentum2 / EARTH_MU_KM3_PER_S2;
  const eccentricity2 = 1 + semiLatusRectumKm * (v2 / EARTH_MU_KM3_PER_S2 - 2 / r);
  return semiLatusRectumKm / (1 + Math.sqrt(Math.max(0, eccentricity2)));
}
