import { cross, dot, type Matrix3, norm, rotate, scale, type Vector3 } from '../vector.js';
import { perpendicularTo } from './encounter-plane.js';
import { discProbability } from './foster.js';
import { integrate } from './quadrature.js';

const SQRT_TWO_PI = Math.sqrt(2 * Math.PI);
const RELATIVE_TOLERANCE = 1e-6;

/**
 * Mass of a three-dimensional normal distribution about 0 in a slice of a ball: the points of the ball whose
 * component along `direction`, counted from the center of the ball, lies between two limits.
 *
 * The slices across `direction` are discs, and the distribution in each is a two-dimensional one.
 *
 * @param center of the ball, meters
 * @param covarianceM2 positive definite, square meters
 * @param direction of any length
 * @param fromM at least -`radiusM`
 * @param toM at most `radiusM`
 */
export function massInBall(
  center: Vector3,
  radiusM: number,
  covarianceM2: Matrix3,
  direction: Vector3,
  fromM: number,
  toM: number,
): number {
  if (!(toM > fromM)) return 0;
  const normal = scale(direction, 1 / norm(direction));
  const first = perpendicularTo(normal);
  const second = cross(normal, first);
  const toNormal = rotate(covarianceM2, normal);
  const variance = dot(normal, toNormal);
  const sigma = Math.sqrt(variance);
  // Given the component along the normal, the other two have their mean along `slope` and this covariance.
  const slope1 = dot(first, toNormal) / variance;
  const slope2 = dot(second, toNormal) / variance;
  const toFirst = rotate(covarianceM2, first);
  const c11 = dot(first, toFirst) - slope1 * slope1 * variance;
  const c12 = dot(second, toFirst) - slope1 * slope2 * variance;
  const c22 = dot(second, rotate(covarianceM2, second)) - slope2 * slope2 * variance;
  const half = 0.5 * (c11 - c22);
  const larger = 0.5 * (c11 + c22) + Math.hypot(half, c12);
  const smaller = (c11 * c22 - c12 * c12) / larger;
  if (!(smaller > 0)) return 0;
  const angle = 0.5 * Math.atan2(c12, half);
  const cos = Math.cos(angle);
  const sin = Math.sin(angle);
  const sigmaX = Math.sqrt(larger);
  const sigmaY = Math.sqrt(smaller);
  const along = dot(normal, center);
  const across1 = dot(first, center);
  const across2 = dot(second, center);
  const slice = (z: number): number => {
    const q = along + z;
    const miss1 = across1 - slope1 * q;
    const miss2 = across2 - slope2 * q;
    const disc = Math.sqrt(Math.max(0, radiusM * radiusM - z * z));
    const inDisc = discProbability(
      sigmaX,
      sigmaY,
      cos * miss1 + sin * miss2,
      cos * miss2 - sin * miss1,
      disc,
    );
    return (inDisc * Math.exp((-0.5 * q * q) / variance)) / (sigma * SQRT_TWO_PI);
  };
  // The peak may be narrow beside the ball: split about the center of the distribution.
  const bounds = [fromM, toM];
  for (const sigmas of [-4, -1, 0, 1, 4]) {
    const z = sigmas * sigma - along;
    if (z > fromM && z < toM) bounds.push(z);
  }
  bounds.sort((one, other) => one - other);
  return integrate(slice, bounds, RELATIVE_TOLERANCE);
}
