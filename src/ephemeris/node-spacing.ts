import { EARTH_MU_KM3_PER_S2 } from './gravity.js';

/**
 * Length of a time slab: the unit of work of a search. It does not depend on the number of workers, so
 * that the same input takes the same path.
 */
export const SLAB_S = 14_400;

/** Into how many segments a slab may be cut; all of them give whole milliseconds. */
const SEGMENT_COUNTS = [1, 2, 3, 4, 5, 6, 8, 9, 10, 12, 15, 16, 20, 24, 30, 32, 40, 48, 64];

/** Interpolation error of a two-body orbit that the spacing aims at. */
const TWO_BODY_ERROR_KM = 0.1;

/**
 * For each eccentricity, (perigee rate x segment length) at which the degree-seven segment of a two-body
 * orbit is wrong by 1e-5 of the perigee radius at the worst place of the worst phase. The error goes with
 * the eighth power. `tests/ephemeris/node-spacing.test.ts` works the column out again from Kepler's equation.
 */
export const TWO_BODY_REACH: readonly (readonly [eccentricity: number, perigeeAngle: number])[] = [
  [0, 1.793],
  [0.005, 1.702],
  [0.01, 1.638],
  [0.02, 1.549],
  [0.05, 1.402],
  [0.1, 1.28],
  [0.2, 1.161],
  [0.3, 1.1],
  [0.4, 1.061],
  [0.5, 1.035],
  [0.7, 1.003],
  [1, 0.98],
];

/**
 * Number of equal segments of a slab for one orbit, so that a two-body orbit is met within 100 m; SGP4's
 * own orbits are then met within about 250 m, which the search verifies while it runs.
 *
 * @param eccentricity mean eccentricity; 0.005 is added for what J2 does to the osculating one
 * @param perigeeRadiusKm distance of the perigee from the Earth's center
 */
export function segmentsPerSlab(eccentricity: number, perigeeRadiusKm: number): number {
  const e = Math.min(1, eccentricity + 0.005);
  let row = 1;
  while (row < TWO_BODY_REACH.length - 1 && TWO_BODY_REACH[row][0] < e) row++;
  const [e0, angle0] = TWO_BODY_REACH[row - 1];
  const [e1, angle1] = TWO_BODY_REACH[row];
  const angle = angle0 + ((angle1 - angle0) * (e - e0)) / (e1 - e0);
  const perigeeRate = Math.sqrt((EARTH_MU_KM3_PER_S2 * (1 + e)) / perigeeRadiusKm ** 3);
  const lengthS = (angle * (TWO_BODY_ERROR_KM / (1e-5 * perigeeRadiusKm)) ** (1 / 8)) / perigeeRate;
  const wanted = SLAB_S / lengthS;
  return SEGMENT_COUNTS.find((count) => count >= wanted) ?? SEGMENT_COUNTS[SEGMENT_COUNTS.length - 1];
}
