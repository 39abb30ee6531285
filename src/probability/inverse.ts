import type { Matrix3 } from '../vector.js';

/** Below this part of the product of the variances a determinant is rounding. */
const SINGULAR = 1e-12;

/**
 * Inverse and determinant of a covariance.
 *
 * @param matrix symmetric
 * @returns `undefined` where the matrix is singular or not positive definite, up to rounding
 */
export function inverseOf(
  matrix: Matrix3,
): { readonly inverse: Matrix3; readonly determinant: number } | undefined {
  const xx = matrix[0][0];
  const xy = matrix[0][1];
  const xz = matrix[0][2];
  const yy = matrix[1][1];
  const yz = matrix[1][2];
  const zz = matrix[2][2];
  const cofactorXx = yy * zz - yz * yz;
  const cofactorXy = xz * yz - xy * zz;
  const cofactorXz = xy * yz - xz * yy;
  const determinant = xx * cofactorXx + xy * cofactorXy + xz * cofactorXz;
  if (!(xx > 0 && yy > 0 && zz > 0 && determinant > SINGULAR * xx * yy * zz)) return undefined;
  const ixx = cofactorXx / determinant;
  const ixy = cofactorXy / determinant;
  const ixz = cofactorXz / determinant;
  const iyy = (xx * zz - xz * xz) / determinant;
  const iyz = (xy * xz - xx * yz) / determinant;
  const izz = (xx * yy - xy * xy) / determinant;
  return {
    determinant,
    inverse: [
      [ixx, ixy, ixz],
      [ixy, iyy, iyz],
      [ixz, iyz, izz],
    ],
  };
}
