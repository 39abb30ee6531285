import { beforeAll, describe, expect, it } from 'vitest';
import type { ElementSet } from '../../src/elements/element-set.js';
import { sgp4RecordOf } from '../../src/elements/sgp4-record.js';
import { loadSgp4 } from '../../src/ephemeris/sgp4-module.js';
import { sgp4RecordsOf } from '../../src/ephemeris/sgp4-records.js';
import { type PathSide, pathProbability } from '../../src/jobs/path-probability.js';
import { assessInFull } from '../../src/probability/assess-encounter.js';
import { monteCarlo } from '../../src/probability/monte-carlo.js';
import { testStraightLine } from '../../src/probability/straight-line.js';
import { covarianceRtnM2 } from '../../src/uncertainty/sigma-table.js';
import type { Vector3 } from '../../src/vector.js';
import { bruteForceEncounters } from '../encounters/brute-force.js';
import { sgp4StateAt } from '../ephemeris/sgp4-state.js';
import { syntheticCatalog } from '../synthetic/catalog.js';
import { seededRandom } from '../synthetic/random.js';

const START_MS = Date.UTC(2026, 11, 1);
const HOURS_6_MS = 6 * 3_600_000;

beforeAll(loadSgp4);

type Side = PathSide & { readonly set: ElementSet };

function side(set: ElementSet, timeMs: number, sigmaRtnM: Vector3): Side {
  const state = new Float64Array(6);
  expect(sgp4StateAt(sgp4RecordOf(set), set.epochMs, timeMs, state)).toBe(true);
  return {
    set,
    records: sgp4RecordsOf([set]),
    place: 0,
    covarianceRtnM2: covarianceRtnM2(sigmaRtnM),
    positionKm: [state[0], state[1], state[2]],
    velocityKmPerS: [state[3], state[4], state[5]],
  };
}

function assessed(one: PathSide, other: PathSide, hardBodyRadiusM: number) {
  return assessInFull({
    object1: one,
    object2: other,
    hardBodyRadiusM,
  });
}

/** True SGP4 states of both sides, without interpolation. */
function truth(one: Side, other: Side) {
  const out = new Float64Array(6);
  const at = ({ set }: Side, timeMs: number) => {
    sgp4StateAt(sgp4RecordOf(set), set.epochMs, timeMs, out);
    return {
      positionKm: [out[0], out[1], out[2]] as const,
      velocityKmPerS: [out[3], out[4], out[5]] as const,
    };
  };
  return (timeMs: number) => ({ object1: at(one, timeMs), object2: at(other, timeMs) });
}

const WINDOW = { startMs: START_MS, endMs: START_MS + HOURS_6_MS };
const MIXED = syntheticCatalog({ seed: 61, count: 150, epochMs: START_MS });
const TRAINS = syntheticCatalog({
  seed: 64,
  count: 60,
  epochMs: START_MS,
  mix: { low: 0, eccentric: 0, medium: 0, geosynchronous: 0, decaying: 0, train: 1 },
});

describe('pathProbability', () => {
  it('keeps the two-dimensional figure where the full test of straightness holds, whatever the sigmas', () => {
    const random = seededRandom(62);
    let straight = 0;
    let bent = 0;
    for (const { i, j, tcaMs, missKm } of bruteForceEncounters({ first: MIXED, ...WINDOW, missKm: 60 })) {
      const size = 1000 * missKm * 10 ** random.between(-1, 0);
      const one = side(MIXED[i], tcaMs, [size * 0.5, size, size * 0.5]);
      const other = side(MIXED[j], tcaMs, [size * 0.5, size, size * 0.6]);
      const full = assessed(one, other, 10);
      const path = pathProbability(one, other, tcaMs, 10, full, tcaMs - HOURS_6_MS, tcaMs + HOURS_6_MS);
      const tested = testStraightLine({
        statesAt: truth(one, other),
        tcaMs,
        covariance1RtnM2: one.covarianceRtnM2,
        covariance2RtnM2: other.covarianceRtnM2,
        hardBodyRadiusM: 10,
      });
      // Not asked where the probability is as good as none.
      if (path.isStraight === undefined) continue;
      expect(path.isStraight).toBe(tested.isStraight);
      if (tested.isStraight) {
        straight++;
        expect(path).toMatchObject({ method: 'FOSTER-1992', probability: full.collisionProbability });
      } else {
        bent++;
      }
    }
    expect(straight).toBeGreaterThan(5);
    expect(bent).toBeGreaterThan(5);
  });

  it('agrees along the curved path with a Monte Carlo on true SGP4 states', () => {
    let compared = 0;
    const slow = bruteForceEncounters({ first: TRAINS, ...WINDOW, missKm: 20 });
    for (const { i, j, tcaMs, missKm, relativeSpeedKmPerS } of slow) {
      if (relativeSpeedKmPerS > 0.05 || compared === 3) continue;
      const sigmaM = 800 * missKm;
      const one = side(TRAINS[i], tcaMs, [sigmaM / 2, sigmaM, sigmaM / 2]);
      const other = side(TRAINS[j], tcaMs, [sigmaM / 2, sigmaM, sigmaM / 2]);
      const radiusM = sigmaM / 2;
      const full = assessed(one, other, radiusM);
      const fromMs = tcaMs - 600_000;
      const toMs = tcaMs + 600_000;
      const path = pathProbability(one, other, tcaMs, radiusM, full, fromMs, toMs);
      if (path.method === 'FOSTER-1992' || (path.probability ?? 0) < 0.01) continue;
      const tried = monteCarlo(
        {
          statesAt: truth(one, other),
          fromMs,
          tcaMs,
          toMs,
          covariance1RtnM2: one.covarianceRtnM2,
          covariance2RtnM2: other.covarianceRtnM2,
          hardBodyRadiusM: radiusM,
        },
        3000,
        63,
      );
      compared++;
      expect(path.probability).toBeGreaterThan(tried.low);
      expect(path.probability).toBeLessThan(tried.high);
    }
    expect(compared).toBe(3);
  });
});
