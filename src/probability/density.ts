import { dot, type Matrix3, rotate, type Vector3 } from '../vector.js';
import { inverseOf } from './inverse.js';

/** A three-dimensional normal distribution about 0. */
export type Density = {
  readonly inverse: Matrix3;
  readonly logNorm: number;
  /** At most the smallest one-sigma, at least 0.57 of it. */
  readonly smallestSigmaM: number;
};

/** @returns `undefined` where the covariance is singular */
export function densityOf(covarianceM2: Matrix3): Density | undefined {
  const inverted = inverseOf(covarianceM2);
  if (inverted === undefined) return undefined;
  const { inverse, determinant } = inverted;
  const logNorm = -0.5 * Math.log((2 * Math.PI) ** 3 * determinant);
  return { inverse, logNorm, smallestSigmaM: smallestSigmaOf(inverse) };
}

/** The trace of the inverse is at most three times its largest eigenvalue, at least that eigenvalue. */
function smallestSigmaOf(inverse: Matrix3): number {
  return 1 / Math.sqrt(inverse[0][0] + inverse[1][1] + inverse[2][2]);
}

/** Logarithm of the density at a point, 1/m^3. */
export function logDensity({ inverse, logNorm }: Density, x: number, y: number, z: number): number {
  // By index: taking the rows apart by patterns costs several times as much.
  const first = inverse[0];
  const second = inverse[1];
  return (
    logNorm -
    0.5 *
      (x * (first[0] * x + 2 * (first[1] * y + first[2] * z)) +
        y * (second[1] * y + 2 * second[2] * z) +
        inverse[2][2] * z * z)
  );
}

/** The largest that it can be at a point within `reachM` of `centerM`. */
export function logDensityWithin(
  { inverse, logNorm, smallestSigmaM }: Density,
  centerM: Vector3,
  reachM: number,
): number {
  const nearest = Math.sqrt(dot(centerM, rotate(inverse, centerM))) - reachM / smallestSigmaM;
  return logNorm - 0.5 * Math.max(0, nearest) ** 2;
}
