import { type Matrix3, rotate, type Vector3 } from '../vector.js';
import { requireFinite, shown } from './arguments.js';

/** What rounding may do to symmetry and definiteness, relative to the variances. */
const TOLERANCE = 1e-9;

/**
 * Checks a position covariance: 3 by 3, finite, symmetric and positive semidefinite up to rounding (1e-9 of
 * the variances).
 *
 * @throws RangeError with `name` and the value
 */
export function requireCovariance(name: string, value: unknown): asserts value is Matrix3 {
  if (!Array.isArray(value) || value.length !== 3 || value.some((row) => !isTriple(row))) {
    throw new RangeError(`${name} must have three rows of three numbers, got ${shown(value)}`);
  }
  for (let i = 0; i < 3; i++) for (let j = 0; j < 3; j++) requireFinite(`${name}[${i}][${j}]`, value[i][j]);
  const matrix = value as unknown as Matrix3;
  for (let i = 0; i < 3; i++) {
    if (matrix[i][i] < 0) {
      throw new RangeError(`${name}[${i}][${i}] is a variance and must not be negative, got ${matrix[i][i]}`);
    }
  }
  for (const [i, j] of PAIRS) {
    const size = Math.sqrt(matrix[i][i]) * Math.sqrt(matrix[j][j]);
    // With one of the variances 0, elements that match exactly are left to the test of definiteness.
    if (Math.abs(matrix[i][j] - matrix[j][i]) > TOLERANCE * size) {
      throw new RangeError(
        `${name} must be symmetric, but [${i}][${j}] is ${matrix[i][j]} and [${j}][${i}] is ${matrix[j][i]}`,
      );
    }
  }
  if (!isPositiveSemidefinite(matrix)) {
    throw new RangeError(`${name} must be positive semidefinite, got ${shown(matrix)}`);
  }
}

const PAIRS = [
  [0, 1],
  [0, 2],
  [1, 2],
] as const;

/** By the minors of the correlation matrix, so that variances of any size weigh alike. */
function isPositiveSemidefinite(matrix: Matrix3): boolean {
  const [r01, r02, r12] = PAIRS.map(([i, j]) => {
    const size = Math.sqrt(matrix[i][i]) * Math.sqrt(matrix[j][j]);
    if (size === 0) return matrix[i][j] === 0 ? 0 : Number.POSITIVE_INFINITY;
    return matrix[i][j] / size;
  });
  if ([r01, r02, r12].some((r) => Math.abs(r) > 1 + TOLERANCE)) return false;
  return 1 + 2 * r01 * r02 * r12 - r01 * r01 - r02 * r02 - r12 * r12 >= -TOLERANCE;
}

function isTriple(value: unknown): boolean {
  return Array.isArray(value) && value.length === 3;
}

/**
 * Turns a covariance from the axes of `frame` into the axes in which the rows of `frame` are given:
 * transposed frame x covariance x frame.
 *
 * @param frame rows are the unit vectors of the frame, as `rtnFrame` gives them
 */
export function covarianceOutOf(frame: Matrix3, covariance: Matrix3): Matrix3 {
  const [f, g, h] = frame;
  const toFirst = rotate(covariance, [f[0], g[0], h[0]]);
  const toSecond = rotate(covariance, [f[1], g[1], h[1]]);
  const toThird = rotate(covariance, [f[2], g[2], h[2]]);
  const xx = f[0] * toFirst[0] + g[0] * toFirst[1] + h[0] * toFirst[2];
  const xy = f[0] * toSecond[0] + g[0] * toSecond[1] + h[0] * toSecond[2];
  const xz = f[0] * toThird[0] + g[0] * toThird[1] + h[0] * toThird[2];
  const yy = f[1] * toSecond[0] + g[1] * toSecond[1] + h[1] * toSecond[2];
  const yz = f[1] * toThird[0] + g[1] * toThird[1] + h[1] * toThird[2];
  const zz = f[2] * toThird[0] + g[2] * toThird[1] + h[2] * toThird[2];
  return [
    [xx, xy, xz],
    [xy, yy, yz],
    [xz, yz, zz],
  ];
}

/** Sum of two matrices: the covariance of a difference of independent errors. */
export function sumOf(a: Matrix3, b: Matrix3): Matrix3 {
  const row = (i: 0 | 1 | 2): Vector3 => [a[i][0] + b[i][0], a[i][1] + b[i][1], a[i][2] + b[i][2]];
  return [row(0), row(1), row(2)];
}
