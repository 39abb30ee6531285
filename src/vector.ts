/** Three components of a vector; the name of whatever holds it says frame and unit. */
export type Vector3 = readonly [number, number, number];

/** Three rows of a 3 by 3 matrix. */
export type Matrix3 = readonly [Vector3, Vector3, Vector3];

export function dot(a: Vector3, b: Vector3): number {
  return a[0] * b[0] + a[1] * b[1] + a[2] * b[2];
}

export function cross(a: Vector3, b: Vector3): Vector3 {
  return [a[1] * b[2] - a[2] * b[1], a[2] * b[0] - a[0] * b[2], a[0] * b[1] - a[1] * b[0]];
}

export function subtract(a: Vector3, b: Vector3): Vector3 {
  return [a[0] - b[0], a[1] - b[1], a[2] - b[2]];
}

export function scale(a: Vector3, factor: number): Vector3 {
  return [a[0] * factor, a[1] * factor, a[2] * factor];
}

/** By the square root of the sum, which is several times faster than `Math.hypot`: lengths are nowhere near overflow. */
export function norm(a: Vector3): number {
  return Math.sqrt(dot(a, a));
}

/** `matrix` times `a`. */
export function rotate(matrix: Matrix3, a: Vector3): Vector3 {
  return [dot(matrix[0], a), dot(matrix[1], a), dot(matrix[2], a)];
}

/** `matrix` transposed, times `a`. */
export function rotateBack(matrix: Matrix3, a: Vector3): Vector3 {
  return [
    matrix[0][0] * a[0] + matrix[1][0] * a[1] + matrix[2][0] * a[2],
    matrix[0][1] * a[0] + matrix[1][1] * a[1] + matrix[2][1] * a[2],
    matrix[0][2] * a[0] + matrix[1][2] * a[1] + matrix[2][2] * a[2],
  ];
}
