import { describe, expect, it } from 'vitest';
import { massInBall } from '../../src/probability/ball-mass.js';
import { erf } from '../../src/probability/error-function.js';
import type { Matrix3 } from '../../src/vector.js';
import { diagonal } from './slow-encounters.js';

/** Equal sigmas of 1: the non-central chi-square distribution with three degrees of freedom, in closed form. */
function closedForm(distance: number, radius: number): number {
  const near = radius - distance;
  const far = radius + distance;
  return (
    0.5 * (erf(near * Math.SQRT1_2) + erf(far * Math.SQRT1_2)) -
    (Math.exp(-0.5 * near * near) - Math.exp(-0.5 * far * far)) / (distance * Math.sqrt(2 * Math.PI))
  );
}

describe('massInBall', () => {
  it.each([
    [1, 0.5],
    [0.01, 2],
    [3, 2.5],
    [2, 6],
    [30, 30.5],
  ])('is the closed form for equal sigmas, center %d sigmas off, radius %d sigmas', (distance, radius) => {
    const mass = massInBall(
      [0, 7 * distance, 0],
      7 * radius,
      diagonal([7, 7, 7]),
      [1, 2, 3],
      -7 * radius,
      7 * radius,
    );
    expect(mass / closedForm(distance, radius)).toBeCloseTo(1, 5);
  });

  it.each<[[number, number, number], number, Matrix3, number]>([
    // Gauss-Legendre in spherical coordinates with NumPy, 80 by 80 by 160 points.
    [
      [30, -12, 7],
      25,
      [
        [900, -350, 40],
        [-350, 1600, -100],
        [40, -100, 150],
      ],
      0.11629782874175597,
    ],
    [
      [3, 2, 1],
      6,
      [
        [9, 2, 0],
        [2, 4, 1],
        [0, 1, 5],
      ],
      0.6687023883638628,
    ],
  ])('agrees with NumPy for a full covariance, center %o', (center, radius, covariance, reference) => {
    for (const direction of [
      [1, 0, 0],
      [0.3, -2, 0.4],
    ] as const) {
      const mass = massInBall(center, radius, covariance, direction, -radius, radius);
      expect(mass / reference).toBeCloseTo(1, 5);
    }
    const parts =
      massInBall(center, radius, covariance, [1, 1, 0], -radius, 0) +
      massInBall(center, radius, covariance, [1, 1, 0], 0, radius);
    expect(parts / reference).toBeCloseTo(1, 5);
  });
});
