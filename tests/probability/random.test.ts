import { describe, expect, it } from 'vitest';
import { normalGenerator, uniformGenerator, xoshiro128StarStar } from '../../src/probability/random.js';

describe('xoshiro128StarStar', () => {
  it('starts as the published algorithm does from the state 1, 2, 3, 4', () => {
    // The first four numbers of the authors' reference code (from memory); the first two checked by hand.
    const next = xoshiro128StarStar(1, 2, 3, 4);
    expect([next(), next(), next(), next()]).toEqual([11520, 0, 5927040, 70819200]);
  });
});

describe('uniformGenerator', () => {
  it('repeats itself for the same seed and differs for another', () => {
    const draw = (seed: number) => {
      const uniform = uniformGenerator(seed);
      return Array.from({ length: 5 }, uniform);
    };
    expect(draw(7)).toEqual(draw(7));
    expect(draw(7)).not.toEqual(draw(8));
    expect(draw(0)[0]).not.toBe(draw(0)[1]);
  });

  it('fills the interval evenly', () => {
    const uniform = uniformGenerator(1);
    const counts = new Array(64).fill(0);
    for (let i = 0; i < 640_000; i++) counts[Math.floor(64 * uniform())]++;
    const chiSquare = counts.reduce((sum, count) => sum + (count - 10_000) ** 2 / 10_000, 0);
    // 63 degrees of freedom: 99.9 % of samples lie between 32 and 104 (scipy.stats.chi2).
    expect(chiSquare).toBeGreaterThan(32);
    expect(chiSquare).toBeLessThan(104);
  });
});

describe('normalGenerator', () => {
  it('has the moments and tails of the standard normal distribution, without correlation', () => {
    const normal = normalGenerator(uniformGenerator(2));
    const count = 2_000_000;
    let [sum, square, fourth, beyond2, lagged, before] = [0, 0, 0, 0, 0, 0];
    for (let i = 0; i < count; i++) {
      const z = normal();
      sum += z;
      square += z * z;
      fourth += z ** 4;
      lagged += z * before;
      before = z;
      if (Math.abs(z) > 2) beyond2++;
    }
    // Each within four standard errors.
    expect(Math.abs(sum / count)).toBeLessThan(4 / Math.sqrt(count));
    expect(Math.abs(square / count - 1)).toBeLessThan(4 * Math.sqrt(2 / count));
    expect(Math.abs(fourth / count - 3)).toBeLessThan(4 * Math.sqrt(96 / count));
    expect(Math.abs(lagged / count)).toBeLessThan(4 / Math.sqrt(count));
    expect(Math.abs(beyond2 / count - 0.0455)).toBeLessThan(4 * Math.sqrt(0.0455 / count));
  });
});
