import { describe, expect, it } from 'vitest';
import { LARGEST_VARIATION, smallDiscProbability, variationOver } from '../../src/probability/small-disc.js';
import { logUniform, seeded } from './seeded.js';

const ANGLES = 64;

/** The Gaussian summed over the disc in polar coordinates: midpoints in the square of the radius and in the angle. */
function summed(x: number, y: number, a: number, b: number): number {
  const mean = (rings: number): number => {
    let sum = 0;
    for (let i = 0; i < rings; i++) {
      const r = Math.sqrt((i + 0.5) / rings);
      for (let j = 0; j < ANGLES; j++) {
        const phi = (2 * Math.PI * j) / ANGLES;
        sum += Math.exp(-0.5 * ((x + a * r * Math.cos(phi)) ** 2 + (y + b * r * Math.sin(phi)) ** 2));
      }
    }
    return sum / (rings * ANGLES);
  };
  // Richardson's extrapolation of the midpoint rule.
  return (0.5 * a * b * (4 * mean(200) - mean(100))) / 3;
}

describe('smallDiscProbability', () => {
  it('agrees with a sum over the disc up to the largest variation, 300 random cases', () => {
    const random = seeded(11);
    let near = 0;
    for (let i = 0; i < 300; i++) {
      const x = 20 * random() ** 2;
      const y = 20 * random() ** 2;
      let a = logUniform(random, 1e-3, 1);
      let b = logUniform(random, 1e-3, 1);
      // Every other case stands just below the limit.
      const shrink = Math.sqrt(LARGEST_VARIATION / variationOver(x, y, a, b));
      if (i % 2 === 0 || shrink < 1) [a, b] = [0.9999 * shrink * a, 0.9999 * shrink * b];
      const variation = variationOver(x, y, a, b);
      if (variation > 3.9) near++;
      expect(variation).toBeLessThanOrEqual(LARGEST_VARIATION);
      const reference = summed(x, y, a, b);
      const which = `${x}, ${y}, ${a}, ${b}`;
      const found = smallDiscProbability(x, y, a, b, variation);
      expect(Math.abs(found / reference - 1), which).toBeLessThan(1e-9);
    }
    expect(near).toBeGreaterThan(100);
  });

  it('is the closed form about the center with equal sigmas', () => {
    for (const a of [1e-8, 1e-3, 0.1, 0.4]) {
      const found = smallDiscProbability(0, 0, a, a, variationOver(0, 0, a, a));
      expect(Math.abs(found / -Math.expm1(-0.5 * a * a) - 1)).toBeLessThan(1e-14);
    }
  });
});

describe('variationOver', () => {
  it('is no figure below the limit for arguments too far apart', () => {
    expect(variationOver(Number.POSITIVE_INFINITY, 0, 0, 0) <= LARGEST_VARIATION).toBe(false);
    expect(variationOver(0, 1, Number.POSITIVE_INFINITY, 1) <= LARGEST_VARIATION).toBe(false);
  });
});
