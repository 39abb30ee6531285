import { describe, expect, it } from 'vitest';
import { sgp4RecordOf } from '../../src/elements/sgp4-record.js';
import { assessEncounter } from '../../src/index.js';
import { curvedPathProbability } from '../../src/probability/curved-path.js';
import type { PathEncounter } from '../../src/probability/encounter-path.js';
import { firstEntryProbability } from '../../src/probability/first-entry.js';
import { monteCarlo } from '../../src/probability/monte-carlo.js';
import { sgp4StateAt } from '../ephemeris/sgp4-state.js';
import { diagonal, encounterOf, TCA_MS } from './slow-encounters.js';

function fosterOf(encounter: PathEncounter): number {
  const { object1, object2 } = encounter.statesAt(encounter.tcaMs);
  const { collisionProbability } = assessEncounter({
    object1: { ...object1, covarianceRtnM2: encounter.covariance1RtnM2 },
    object2: { ...object2, covarianceRtnM2: encounter.covariance2RtnM2 },
    hardBodyRadiusM: encounter.hardBodyRadiusM,
  });
  return collisionProbability ?? Number.NaN;
}

function curvedOf(encounter: PathEncounter) {
  const found = curvedPathProbability(encounter);
  if (found === undefined) throw new Error('no probability');
  return found;
}

const SIGMA_1 = [100, 300, 100] as const;
const SIGMA_2 = [80, 400, 120] as const;

describe('curvedPathProbability', () => {
  it.each([
    ['crossing', encounterOf([20, 0, 30], [0, -7000, 7500], SIGMA_1, SIGMA_2, 20, 20)],
    ['head on', encounterOf([150, 0, 90], [0, -14_900, 100], SIGMA_1, SIGMA_2, 10, 20)],
    ['far out in the tail', encounterOf([500, 0, 300], [0, -7000, 7500], SIGMA_1, SIGMA_2, 5, 20)],
    ['oblique', encounterOf([20, 0, 30], [200, -900, 5000], [100, 900, 60], [80, 700, 50], 20, 20)],
    ['half a kilometer per second', encounterOf([20, 10, 30], [0, -17, 500], SIGMA_1, SIGMA_2, 50, 20)],
  ])('agrees with the two-dimensional probability for a fast encounter: %s', (_, encounter) => {
    const found = curvedOf(encounter);
    expect(found.method).toBe('ADJOINING-TUBES');
    expect(Math.abs(found.probability / fosterOf(encounter) - 1)).toBeLessThan(0.002);
  });

  it.each<[string, PathEncounter, string]>([
    ['fast', encounterOf([20, 0, 30], [0, -7000, 7500], SIGMA_1, SIGMA_2, 50, 20), 'ADJOINING-TUBES'],
    ['slow, 50 m/s', encounterOf([50, 0, 30], [3, -1, 50], SIGMA_1, SIGMA_2, 50, 20), 'ADJOINING-TUBES'],
    ['slow, 5 m/s', encounterOf([30, 0, 20], [3, 0.5, 4], SIGMA_1, SIGMA_2, 50, 20), 'ADJOINING-TUBES'],
    [
      'slow, large sigmas',
      encounterOf([100, 0, -80], [2, -9, 9], [150, 1500, 200], [200, 900, 150], 200, 20),
      'ADJOINING-TUBES',
    ],
    [
      '1 m/s',
      encounterOf([30, 0, 20], [0.6, 0.1, 0.8], [50, 200, 60], [40, 200, 60], 30, 20),
      'ADJOINING-TUBES',
    ],
    [
      'very slow',
      encounterOf([30, 0, 20], [0.03, 0.01, 0.02], [50, 200, 60], [40, 200, 60], 30, 20),
      'FIRST-ENTRY',
    ],
    ['grazing', encounterOf([55, 0, 0], [0, 0, 20], [8, 80, 8], [4, 70, 5], 50, 20), 'ADJOINING-TUBES'],
    [
      'grazing, small sigmas',
      encounterOf([51, 0, 0], [0.1, 0.2, 3], [3, 20, 3], [2, 15, 4], 50, 20),
      'ADJOINING-TUBES',
    ],
    [
      'inside the radius all the time',
      encounterOf([3, 2, 1], [0.001, 0.002, 0], [12, 20, 12], [9, 15, 12], 40, 20),
      'FIRST-ENTRY',
    ],
    [
      'reversing',
      encounterOf([0, 100, 20], [0, -0.01, 0.01], [30, 60, 20], [30, 60, 20], 30, 90),
      'FIRST-ENTRY',
    ],
    [
      'hopping along the orbit',
      encounterOf([10, 100, 0], [-0.1, -0.02, 0], [10, 20, 10], [10, 20, 10], 30, 45),
      'FIRST-ENTRY',
    ],
    [
      'looping back, both ends of the window far away',
      encounterOf([50, 0, 0], [0, -0.0809, 0.02], [20, 40, 20], [20, 40, 20], 40, 90),
      'FIRST-ENTRY',
    ],
    [
      'cut off in the middle',
      { ...encounterOf([30, 0, 20], [3, 0.5, 4], SIGMA_1, SIGMA_2, 50, 20), toMs: TCA_MS },
      'FIRST-ENTRY',
    ],
  ])('agrees with the Monte Carlo: %s', (_, encounter, method) => {
    const found = curvedOf(encounter);
    const tried = monteCarlo(encounter, 40_000, 1);
    expect(found.method).toBe(method);
    expect(found.probability).toBeGreaterThanOrEqual(tried.low);
    expect(found.probability).toBeLessThanOrEqual(tried.high);
    // The interval must be narrow enough to tell something.
    expect(tried.high - tried.low).toBeLessThan(0.3 * tried.probability);
  });

  it('differs from the two-dimensional probability where that one fails', () => {
    const encounter = encounterOf([30, 0, 20], [0.03, 0.01, 0.02], [50, 200, 60], [40, 200, 60], 30, 20);
    expect(fosterOf(encounter)).toBeGreaterThan(monteCarlo(encounter, 40_000, 1).high);
  });

  it('counts errors once where tubes would count them twice', () => {
    const encounter = encounterOf([0, 100, 20], [0, -0.01, 0.01], [30, 60, 20], [30, 60, 20], 30, 90);
    const found = curvedOf(encounter);
    expect(found.leastCosine).toBeLessThan(-0.9);
    expect(found.tubes).toBeGreaterThan(1.08 * found.probability);
  });

  it('agrees with the count of first entries where the path does not come back', () => {
    for (const encounter of [
      encounterOf([50, 0, 30], [3, -1, 50], SIGMA_1, SIGMA_2, 50, 20),
      encounterOf([30, 0, 20], [3, 0.5, 4], SIGMA_1, SIGMA_2, 50, 20),
      encounterOf([55, 0, 0], [0, 0, 20], [8, 80, 8], [4, 70, 5], 50, 20),
    ]) {
      expect((firstEntryProbability(encounter) ?? 0) / curvedOf(encounter).probability).toBeCloseTo(1, 3);
    }
  });

  it('hardly changes with the objects exchanged', () => {
    const encounter = encounterOf([30, 0, 20], [3, 0.5, 4], SIGMA_1, SIGMA_2, 50, 20);
    const exchanged: PathEncounter = {
      ...encounter,
      statesAt: (timeMs) => {
        const { object1, object2 } = encounter.statesAt(timeMs);
        return { object1: object2, object2: object1 };
      },
      covariance1RtnM2: encounter.covariance2RtnM2,
      covariance2RtnM2: encounter.covariance1RtnM2,
    };
    expect(curvedOf(exchanged).probability / curvedOf(encounter).probability).toBeCloseTo(1, 2);
  });

  it('follows true SGP4 states', () => {
    // Two invented objects on nearly the same orbit, their planes 0.06 degrees apart: some 6 m/s.
    const elements = {
      epochMs: TCA_MS - 3_600_000,
      meanMotionRevPerDay: 15.05,
      eccentricity: 0.0011,
      inclinationDeg: 97.6,
      rightAscensionDeg: 211,
      argumentOfPerigeeDeg: 80,
      meanAnomalyDeg: 12,
      bstar: 3e-5,
    };
    const record1 = sgp4RecordOf(elements);
    const record2 = sgp4RecordOf({ ...elements, inclinationDeg: 97.65, eccentricity: 0.00112 });
    const stateOf = (record: typeof record1, timeMs: number) => {
      const out = new Float64Array(6);
      sgp4StateAt(record, elements.epochMs, timeMs, out);
      return {
        positionKm: [out[0], out[1], out[2]] as const,
        velocityKmPerS: [out[3], out[4], out[5]] as const,
      };
    };
    const statesAt = (timeMs: number) => ({
      object1: stateOf(record1, timeMs),
      object2: stateOf(record2, timeMs),
    });
    // The planes cross near the equator; closest approach by trying.
    let tcaMs = 0;
    let least = Number.POSITIVE_INFINITY;
    for (let t = TCA_MS - 3_600_000; t < TCA_MS; t += 1000) {
      const { object1, object2 } = statesAt(t);
      const distance = Math.hypot(...object1.positionKm.map((x, k) => x - object2.positionKm[k]));
      if (distance < least) [least, tcaMs] = [distance, t];
    }
    const encounter: PathEncounter = {
      statesAt,
      tcaMs,
      fromMs: tcaMs - 1_200_000,
      toMs: tcaMs + 1_200_000,
      covariance1RtnM2: diagonal([120, 500, 140]),
      covariance2RtnM2: diagonal([100, 400, 100]),
      hardBodyRadiusM: 60,
    };
    const found = curvedOf(encounter);
    const tried = monteCarlo(encounter, 40_000, 5);
    expect(tried.hits).toBeGreaterThan(200);
    expect(found.probability).toBeGreaterThanOrEqual(tried.low);
    expect(found.probability).toBeLessThanOrEqual(tried.high);
  });

  it('has no figure for a singular covariance, and 0 for a radius of 0', () => {
    const encounter = encounterOf([30, 0, 20], [3, 0.5, 4], SIGMA_1, SIGMA_2, 50, 20);
    const flat = diagonal([0, 0, 100]);
    expect(
      curvedPathProbability({ ...encounter, covariance1RtnM2: flat, covariance2RtnM2: flat }),
    ).toBeUndefined();
    expect(curvedOf({ ...encounter, hardBodyRadiusM: 0 }).probability).toBe(0);
  });

  it('copes with no relative motion and with a window of no length', () => {
    const encounter = encounterOf([30, 0, 20], [3, 0.5, 4], SIGMA_1, SIGMA_2, 50, 20);
    const { object1 } = encounter.statesAt(TCA_MS);
    const found = curvedOf({ ...encounter, statesAt: () => ({ object1, object2: object1 }) });
    const instant = curvedOf({ ...encounter, fromMs: TCA_MS, toMs: TCA_MS });
    for (const { probability } of [found, instant]) {
      expect(probability).toBeGreaterThan(0);
      expect(probability).toBeLessThan(0.05);
    }
  });

  it('refuses what is no encounter', () => {
    const encounter = encounterOf([30, 0, 20], [3, 0.5, 4], SIGMA_1, SIGMA_2, 50, 20);
    expect(() => curvedPathProbability({ ...encounter, toMs: TCA_MS - 1 })).toThrow(RangeError);
    expect(() => curvedPathProbability({ ...encounter, hardBodyRadiusM: -1 })).toThrow(
      new RangeError('hardBodyRadiusM must not be negative, got -1'),
    );
    expect(() =>
      curvedPathProbability({
        ...encounter,
        covariance2RtnM2: [
          [1, 2, 0],
          [2, 1, 0],
          [0, 0, 1],
        ],
      }),
    ).toThrow('covariance2RtnM2 must be positive semidefinite');
  });
});
