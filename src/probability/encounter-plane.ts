import { cross, dot, type Matrix3, norm, rotate, scale, type Vector3 } from '../vector.js';

/** The encounter in the plane perpendicular to the relative velocity, in principal axes. */
export type EncounterPlane = {
  /** Larger one-sigma of the combined position error in the plane, meters. */
  readonly sigmaXM: number;
  /** Smaller one-sigma, meters. */
  readonly sigmaYM: number;
  /** Miss along the axis of the larger sigma, not negative, meters. */
  readonly missXM: number;
  /** Miss along the axis of the smaller sigma, not negative, meters. */
  readonly missYM: number;
  /**
   * Miss in the plane over the combined one-sigma ellipse, without unit. Along the straight relative path
   * the three-dimensional distance has this figure as its smallest value.
   */
  readonly mahalanobisDistance: number;
};

/**
 * Variances in a ratio above this can't be told from a singular covariance: the smaller one would be
 * rounding of the larger one.
 */
const LARGEST_VARIANCE_RATIO = 1e12;

/**
 * Projects a relative state and its covariance onto the encounter plane along the relative velocity, so
 * that the states need not be exactly those of closest approach, and turns it to principal axes.
 *
 * @param relativePositionM object 2 minus object 1, meters
 * @param relativeVelocity object 2 minus object 1, same frame, any unit
 * @param covarianceM2 covariance of the relative position, same frame, square meters
 * @returns `undefined` where there is no plane or no density in it: relative velocity 0, or covariance
 * singular in the plane (sigmas in a ratio above a million count as that)
 */
export function encounterPlane(
  relativePositionM: Vector3,
  relativeVelocity: Vector3,
  covarianceM2: Matrix3,
): EncounterPlane | undefined {
  const speed = norm(relativeVelocity);
  if (!(speed > 0)) return undefined;
  const along = scale(relativeVelocity, 1 / speed);
  const first = perpendicularTo(along);
  const second = cross(along, first);
  const towardFirst = rotate(covarianceM2, first);
  const c11 = dot(first, towardFirst);
  const c12 = dot(second, towardFirst);
  const c22 = dot(second, rotate(covarianceM2, second));

  // Jacobi's rotation to principal axes; the smaller variance from the determinant, which keeps its digits.
  const half = 0.5 * (c11 - c22);
  const larger = 0.5 * (c11 + c22) + Math.hypot(half, c12);
  const smaller = (c11 * c22 - c12 * c12) / larger;
  if (!(larger > 0) || !(smaller * LARGEST_VARIANCE_RATIO >= larger)) return undefined;
  const angle = 0.5 * Math.atan2(c12, half);
  const cos = Math.cos(angle);
  const sin = Math.sin(angle);
  const miss1 = dot(first, relativePositionM);
  const miss2 = dot(second, relativePositionM);
  const sigmaXM = Math.sqrt(larger);
  const sigmaYM = Math.sqrt(smaller);
  const missXM = Math.abs(cos * miss1 + sin * miss2);
  const missYM = Math.abs(cos * miss2 - sin * miss1);
  return {
    sigmaXM,
    sigmaYM,
    missXM,
    missYM,
    mahalanobisDistance: Math.hypot(missXM / sigmaXM, missYM / sigmaYM),
  };
}

/** A unit vector at a right angle to the unit vector `along`, without cancellation. */
export function perpendicularTo(along: Vector3): Vector3 {
  const x = Math.abs(along[0]);
  const y = Math.abs(along[1]);
  const z = Math.abs(along[2]);
  const axis: Vector3 = x <= y && x <= z ? [1, 0, 0] : y <= z ? [0, 1, 0] : [0, 0, 1];
  const found = cross(along, axis);
  return scale(found, 1 / norm(found));
}
