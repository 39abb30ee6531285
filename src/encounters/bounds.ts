import { EARTH_MU_KM3_PER_S2, EARTH_RADIUS_KM } from '../ephemeris/gravity.js';

/**
 * Why the search misses nothing.
 *
 * The window is cut into steps of 2T. Take an encounter: at a time t + tau, |tau| <= T, around the middle t
 * of a step, two objects are within D of each other. A track lies within E of SGP4's positions, so that its
 * velocity is off by less than 13 E / h with h the length of its segments (3.8 E / h where interpolation errs,
 * by (u (1 - u))^4; 12.2 E / h where SGP4's velocities do). With eps = 2 E (1 + 6.5 T / h) of each track:
 *
 * 1. Their tracks are within D' = D + eps1 + eps2 + (what SGP4's acceleration may differ from gravity over
 *    a step, under 0.1 km) at t + tau, and so are the paths that gravity draws from the tracks' states at t.
 * 2. Radius: during the step the radius of each track stays within r(t) +- (|r'(t)| T + A T^2 / 2), A being
 *    the largest |r''| of its orbit: r'' = (mu / r^2)(p / r - 1), so |r''| <= mu e / perigee^2, with 0.006
 *    added to e for J2. The two intervals, widened so that both together grow by D', overlap.
 * 3. Direction: each track turns by at most w T, w the largest angular rate of its orbit during the step;
 *    so the directions at t differ by at most (w1 + w2) T + (angle under which D' is seen at the Earth's
 *    radius). No orbit above ground turns faster than the parabola that grazes it.
 * 4. Relative path: gravity pulls two objects at distance d apart by at most g d, g = 2 mu / r^3 (the
 *    radial tide, 2.5 percent added for J2). With V the relative speed at t, the straight line through
 *    the relative position and velocity at t passes, at t + tau, within
 *    D' + g (D' T^2 / 2 + V' T^3 / 3) of the origin, V' = (V + g D' T) / (1 - g T^2).
 *
 * 2 and 3 choose the pairs that are looked at, 4 those that are refined, on the tracks and then on SGP4.
 */
export type StepBounds = {
  /** T, half a step, seconds. */
  readonly halfStepS: number;
  /** D' without the tolerances of the two tracks, km. */
  readonly baseReachKm: number;
  /** D' of the two worst tracks, km. */
  readonly widestReachKm: number;
  /** No two ordinary objects whose directions are further apart than this can meet, radians. */
  readonly ordinaryAngle: number;
  /** The same for an ordinary object and a fast one, and for two fast ones. */
  readonly fastAngle: number;
  readonly fastestAngle: number;
};

const ACCELERATION_SLACK_KM = 0.1;
/** Angular rate of a circular orbit at a height of 280 km: few are lower or turn faster in a perigee. */
export const ORDINARY_RATE_PER_S = 1.162e-3;
/** A parabola that grazes the Earth's surface: sqrt(2 mu / R^3) is 1.753e-3. */
export const FASTEST_RATE_PER_S = 1.76e-3;
/** No two bound objects above ground are faster than this relative to each other, km/s (twice 11.18). */
export const FASTEST_RELATIVE_KM_PER_S = 22.4;

/** @param widestToleranceKm largest eps of any track */
export function stepBounds(missKm: number, halfStepS: number, widestToleranceKm: number): StepBounds {
  const baseReachKm = missKm + ACCELERATION_SLACK_KM;
  const widestReachKm = baseReachKm + 2 * widestToleranceKm;
  const seenAngle = 2 * Math.asin(Math.min(1, widestReachKm / (2 * (EARTH_RADIUS_KM - 50))));
  return {
    halfStepS,
    baseReachKm,
    widestReachKm,
    ordinaryAngle: 2 * ORDINARY_RATE_PER_S * halfStepS + 1.01 * seenAngle,
    fastAngle: (ORDINARY_RATE_PER_S + FASTEST_RATE_PER_S) * halfStepS + 1.01 * seenAngle,
    fastestAngle: 2 * FASTEST_RATE_PER_S * halfStepS + 1.01 * seenAngle,
  };
}

/**
 * eps of the bound.
 *
 * @param toleranceKm 2 E of a track
 * @param segmentS h of the track
 */
export function stepToleranceKm(toleranceKm: number, segmentS: number, halfStepS: number): number {
  return toleranceKm * (1 + (6.5 * halfStepS) / segmentS);
}

/** g of the bound: the strongest tide at distance `radiusKm` or more from the Earth's center, per s^2. */
export function tidePerS2(radiusKm: number): number {
  return (2.05 * EARTH_MU_KM3_PER_S2) / (radiusKm * radiusKm * radiusKm);
}

/**
 * How close the straight line must pass for a pair to be refined.
 *
 * @param reachKm D' of the pair
 * @param tide g at the lower of the two
 * @param speedKmPerS relative speed in the middle of the step
 */
export function lineReachKm(halfStepS: number, reachKm: number, tide: number, speedKmPerS: number): number {
  const t2 = halfStepS * halfStepS;
  const speed = (speedKmPerS + tide * reachKm * halfStepS) / (1 - tide * t2);
  return reachKm + tide * (0.5 * reachKm * t2 + (speed * t2 * halfStepS) / 3);
}

/**
 * Bound 4: whether two objects can be within reach of each other at some time of a step.
 *
 * @param states x, y, z (km) and vx, vy, vz (km/s) in its middle, of one from `a` on, of the other from `b` on
 * @param reachKm D' of the pair
 * @param tide g at the lower of the two
 */
export function passesNear(
  states: Float32Array | Float64Array,
  a: number,
  b: number,
  halfStepS: number,
  reachKm: number,
  tide: number,
): boolean {
  const x = states[b] - states[a];
  const y = states[b + 1] - states[a + 1];
  const z = states[b + 2] - states[a + 2];
  const vx = states[b + 3] - states[a + 3];
  const vy = states[b + 4] - states[a + 4];
  const vz = states[b + 5] - states[a + 5];
  const distance2 = x * x + y * y + z * z;
  const along = Math.abs(x * vx + y * vy + z * vz);
  const speed2 = vx * vx + vy * vy + vz * vz;
  const inside = along <= speed2 * halfStepS;
  // Squared distance of the line times speed2 where the nearest point lies inside the step.
  const line = inside
    ? distance2 * speed2 - along * along
    : distance2 + halfStepS * (halfStepS * speed2 - 2 * along);
  const reach = lineReachKm(halfStepS, reachKm, tide, Math.sqrt(speed2));
  return line <= reach * reach * (inside ? speed2 : 1);
}

/** A: the largest |r''| of an orbit, km/s^2. */
export function radialAcceleration(eccentricity: number, perigeeRadiusKm: number): number {
  const lowest = Math.max(EARTH_RADIUS_KM, perigeeRadiusKm - 25);
  return (1.05 * EARTH_MU_KM3_PER_S2 * (eccentricity + 0.006)) / (lowest * lowest);
}

/**
 * No two objects that come within reach of each other in a step are farther apart anywhere in it:
 * D = (D' + 2 T V) / (1 - 2 g T^2).
 *
 * @param reachKm D'
 * @param tide g at the lower of the two
 * @param speedKmPerS V, relative speed in the middle of the step
 */
export function farthestInStepKm(
  halfStepS: number,
  reachKm: number,
  tide: number,
  speedKmPerS: number,
): number {
  return (reachKm + 2 * halfStepS * speedKmPerS) / (1 - 2 * tide * halfStepS * halfStepS);
}

/**
 * Whether the distance of a pair has but one minimum in the step: (d^2)'' = 2 (v^2 + d . d'') is positive
 * where v > sqrt(g) d, and over the step v stays above V - g D T.
 *
 * @param speedKmPerS V, less what the velocities of the two tracks may be off
 */
export function isConvex(halfStepS: number, farthestKm: number, tide: number, speedKmPerS: number): boolean {
  return speedKmPerS > farthestKm * (tide * halfStepS + Math.sqrt(tide));
}
