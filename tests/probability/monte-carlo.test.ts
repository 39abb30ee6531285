import { describe, expect, it } from 'vitest';
import { assessEncounter } from '../../src/index.js';
import { massInBall } from '../../src/probability/ball-mass.js';
import { monteCarlo } from '../../src/probability/monte-carlo.js';
import { diagonal, encounterOf, TCA_MS } from './slow-encounters.js';

const fast = encounterOf([40, 0, 30], [0, -7000, 7400], [60, 300, 80], [50, 200, 60], 50, 5);

describe('monteCarlo', () => {
  it('is the two-dimensional probability for a fast encounter', () => {
    const found = monteCarlo(fast, 100_000, 1);
    const { object1, object2 } = fast.statesAt(TCA_MS);
    const foster = assessEncounter({
      object1: { ...object1, covarianceRtnM2: fast.covariance1RtnM2 },
      object2: { ...object2, covarianceRtnM2: fast.covariance2RtnM2 },
      hardBodyRadiusM: 50,
    }).collisionProbability;
    expect(foster).toBeGreaterThan(found.low);
    expect(foster).toBeLessThan(found.high);
    expect(found.high - found.low).toBeLessThan(0.1 * found.probability);
  });

  it('is the mass in the ball where nothing moves', () => {
    const state = fast.statesAt(TCA_MS).object1;
    const other = {
      ...state,
      positionKm: [state.positionKm[0] + 0.03, state.positionKm[1], state.positionKm[2]],
    } as const;
    const still = {
      ...fast,
      statesAt: () => ({ object1: state, object2: other }),
      covariance1RtnM2: diagonal([20, 30, 25]),
      covariance2RtnM2: diagonal([10, 20, 15]),
    };
    const found = monteCarlo(still, 50_000, 2);
    const combined = diagonal([Math.hypot(20, 10), Math.hypot(30, 20), Math.hypot(25, 15)]);
    const mass = massInBall([30, 0, 0], 50, combined, [1, 0, 0], -50, 50);
    expect(mass).toBeGreaterThan(found.low);
    expect(mass).toBeLessThan(found.high);
  });

  it('is the mass in the ball for errors correlated in all three directions', () => {
    const state = fast.statesAt(TCA_MS).object1;
    const [x, y, z] = state.positionKm;
    const object2 = { ...state, positionKm: [x + 0.03, y + 0.012, z - 0.007] as const };
    const found = monteCarlo(
      {
        ...fast,
        statesAt: () => ({ object1: state, object2 }),
        covariance1RtnM2: [
          [900, 800, -800],
          [800, 1000, -720],
          [-800, -720, 1000],
        ],
        covariance2RtnM2: diagonal([0, 0, 0]),
        hardBodyRadiusM: 25,
      },
      100_000,
      4,
    );
    // Gauss-Legendre in spherical coordinates with NumPy, 80 by 80 by 160 points.
    expect(0.12660298952627483).toBeGreaterThan(found.low);
    expect(0.12660298952627483).toBeLessThan(found.high);
  });

  it('counts only the time that counts', () => {
    const late = { ...fast, tcaMs: TCA_MS + 60_000, fromMs: TCA_MS + 60_000 };
    expect(monteCarlo(late, 5000, 1).hits).toBe(0);
  });

  it('repeats itself for the same seed', () => {
    expect(monteCarlo(fast, 5000, 3)).toEqual(monteCarlo(fast, 5000, 3));
    expect(monteCarlo(fast, 5000, 3).hits).not.toBe(monteCarlo(fast, 5000, 4).hits);
  });

  it('draws correlated errors', () => {
    // Almost all of the error along one line, radial and transverse together: misses along it are likely.
    const covariance1RtnM2 = [
      [10_000, 9900, 0],
      [9900, 10_000, 0],
      [0, 0, 100],
    ] as const;
    const state = fast.statesAt(TCA_MS).object1;
    const hitsAt = (r: number, t: number) => {
      const [x, y, z] = state.positionKm;
      const object2 = { ...state, positionKm: [x + r / 1000, y + t / 1000, z] as const };
      const still = {
        ...fast,
        statesAt: () => ({ object1: state, object2 }),
        covariance1RtnM2,
        covariance2RtnM2: diagonal([1, 1, 1]),
      };
      return monteCarlo(still, 4000, 1).hits;
    };
    expect(hitsAt(90, 90)).toBeGreaterThan(500);
    expect(hitsAt(90, -90)).toBe(0);
  });

  it('has the interval of Wilson at 99 %', () => {
    // scipy.stats.binomtest(h, n).proportion_ci(0.99, 'wilson') for the counts that came out.
    const found = monteCarlo({ ...fast, hardBodyRadiusM: 0 }, 50, 1);
    expect(found).toMatchObject({ hits: 0, probability: 0, low: 0 });
    expect(found.high).toBeCloseTo(0.11715209171762797, 12);
    const some = monteCarlo(fast, 40_000, 1);
    const { hits: h, samples: n } = some;
    // The ends solve (p - h/n)^2 = z^2 p (1 - p) / n.
    for (const p of [some.low, some.high]) {
      expect((Math.abs(p - h / n) * Math.sqrt(n)) / Math.sqrt(p * (1 - p))).toBeCloseTo(2.5758293, 6);
    }
  });

  it.each([
    [0, 1, 'samples must be greater than 0, got 0'],
    [1.5, 1, 'samples must be a whole number, got 1.5'],
    [10, 0.5, 'seed must be a whole number, got 0.5'],
  ])('refuses %d samples with seed %d', (samples, seed, message) => {
    expect(() => monteCarlo(fast, samples, seed)).toThrow(new RangeError(message));
  });

  it('refuses times out of order', () => {
    expect(() => monteCarlo({ ...fast, fromMs: TCA_MS + 1 }, 10, 1)).toThrow('must be in this order');
  });
});
