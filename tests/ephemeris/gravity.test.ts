import { describe, expect, it } from 'vitest';
import { gravityAlong } from '../../src/ephemeris/gravity.js';
import { seededRandom } from '../synthetic/random.js';
import { acceleration, potential, stateOnOrbit } from './motion-under-gravity.js';

describe('gravityAlong', () => {
  const random = seededRandom(1);
  const states = Array.from({ length: 50 }, () =>
    stateOnOrbit(random, random.between(6500, 42_000), random.between(0, 0.8), random.between(0, 6.28)),
  );

  it('gives the slope of the potential of a point mass with J2', () => {
    const rates = new Float64Array(6);
    for (const [x, y, z, ...velocity] of states) {
      gravityAlong(Float64Array.of(x, y, z, ...velocity), 0, rates);
      const h = 0.5;
      const slope = [
        potential(x + h, y, z) - potential(x - h, y, z),
        potential(x, y + h, z) - potential(x, y - h, z),
        potential(x, y, z + h) - potential(x, y, z - h),
      ].map((difference) => difference / (2 * h));
      const size = Math.hypot(...slope);
      for (let axis = 0; axis < 3; axis++)
        expect(Math.abs(rates[axis] - slope[axis]) / size).toBeLessThan(1e-7);
    }
  });

  it('gives how the acceleration changes along the path', () => {
    const rates = new Float64Array(6);
    for (const state of states) {
      gravityAlong(Float64Array.from([0, ...state]), 1, rates);
      const h = 0.5;
      const at = (t: number) => acceleration([0, 1, 2].map((axis) => state[axis] + t * state[3 + axis]));
      const [before, after] = [at(-h), at(h)];
      const change = before.map((value, axis) => (after[axis] - value) / (2 * h));
      const size = Math.hypot(...change);
      for (let axis = 0; axis < 3; axis++) {
        expect(Math.abs(rates[3 + axis] - change[axis]) / size).toBeLessThan(1e-6);
      }
    }
  });
});
