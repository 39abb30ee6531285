import { beforeAll, describe, expect, it } from 'vitest';
import type { ElementSet } from '../../src/elements/element-set.js';
import { type ClosestApproach, distinctApproaches } from '../../src/encounters/closest-approach.js';
import { createPositionSamples } from '../../src/encounters/position-samples.js';
import { SLOW_GRID_MS } from '../../src/encounters/refine-on-sgp4.js';
import { slabCount } from '../../src/encounters/search-problem.js';
import { createSlabSearcher, searchSlab } from '../../src/encounters/search-slab.js';
import { slowMinima } from '../../src/encounters/slow-minima.js';
import { loadSgp4 } from '../../src/ephemeris/sgp4-module.js';
import { sgp4RecordsOf } from '../../src/ephemeris/sgp4-records.js';
import { syntheticCatalog } from '../synthetic/catalog.js';
import { setPassing } from '../synthetic/passing-orbit.js';
import { seededRandom } from '../synthetic/random.js';
import { type BruteForceEncounter, bruteForceEncounters } from './brute-force.js';
import { searchObjectsOf } from './search-objects.js';

const START_MS = Date.UTC(2026, 11, 1);
const HOUR_MS = 3_600_000;

const NONE = { low: 0, eccentric: 0, medium: 0, geosynchronous: 0, decaying: 0, train: 0 };

type Screening = {
  readonly fleet: readonly ElementSet[];
  readonly catalog: readonly ElementSet[];
  readonly within: boolean;
  readonly hours: number;
  readonly missKm: number;
  readonly stepS?: number;
  readonly byPairs?: boolean;
};

function search({ fleet, catalog, within, hours, missKm, ...forced }: Screening): ClosestApproach[] {
  const objects = searchObjectsOf([...fleet, ...catalog], fleet.length);
  const rules = {
    startMs: START_MS,
    endMs: START_MS + hours * HOUR_MS,
    missKm,
    withinPrimaries: within,
    skippedPairs: new Set<number>(),
    ...forced,
  };
  const searcher = createSlabSearcher(objects, rules);
  const found: ClosestApproach[] = [];
  for (let slab = 0; slab < slabCount(rules); slab++) found.push(...searchSlab(searcher, slab).approaches);
  return distinctApproaches(found, objects.count);
}

/** Every encounter of either list has its twin in the other: same pair, TCA and distance. */
function expectSameEncounters(
  found: readonly ClosestApproach[],
  expected: readonly BruteForceEncounter[],
  secondOffset: number,
): void {
  const left = [...found];
  for (const { i, j, tcaMs, missKm, relativeSpeedKmPerS } of expected) {
    const second = j + secondOffset;
    // The distance of a slow pair hardly changes around its minimum: SGP4's rounding moves the time by seconds.
    const toleranceMs = relativeSpeedKmPerS > 0.1 ? 1 : 3000;
    const index = left.findIndex(
      (approach) =>
        approach.first === i && approach.second === second && Math.abs(approach.tcaMs - tcaMs) <= toleranceMs,
    );
    expect(
      index,
      `missed: ${i} ${second} at ${new Date(tcaMs).toISOString()}, ${missKm} km, ${relativeSpeedKmPerS} km/s`,
    ).not.toBe(-1);
    expect(Math.abs(left[index].missKm - missKm)).toBeLessThan(1e-5);
    left.splice(index, 1);
  }
  expect(left, 'found, but not by brute force').toEqual([]);
}

beforeAll(loadSgp4);

describe('the search finds what brute force finds, and nothing else', () => {
  it.each([
    { what: 'the usual mix', seed: 11, mix: undefined, count: 220, missKm: 60, hours: 9 },
    {
      what: 'eccentric orbits',
      seed: 12,
      mix: { low: 0.3, eccentric: 0.7, medium: 0, geosynchronous: 0, decaying: 0, train: 0 },
      count: 200,
      missKm: 100,
      hours: 8,
    },
    {
      what: 'geosynchronous and medium orbits',
      seed: 13,
      mix: { low: 0, eccentric: 0.1, medium: 0.3, geosynchronous: 0.6, decaying: 0, train: 0 },
      count: 150,
      missKm: 400,
      hours: 26,
    },
    {
      what: 'decaying and very low orbits',
      seed: 14,
      mix: { low: 0.2, eccentric: 0.05, medium: 0, geosynchronous: 0, decaying: 0.75, train: 0 },
      count: 200,
      missKm: 40,
      hours: 10,
    },
    {
      what: 'trains of co-orbital satellites',
      seed: 15,
      mix: { low: 0.2, eccentric: 0, medium: 0, geosynchronous: 0, decaying: 0, train: 0.8 },
      count: 120,
      missKm: 50,
      hours: 7,
    },
  ])('all on all: $what', ({ seed, mix, count, missKm, hours }) => {
    const sets = syntheticCatalog({ seed, count, epochMs: START_MS, ...(mix === undefined ? {} : { mix }) });
    const expected = bruteForceEncounters({
      first: sets,
      startMs: START_MS,
      endMs: START_MS + hours * HOUR_MS,
      missKm,
    });
    expect(expected.length).toBeGreaterThan(20);
    for (const byPairs of [false, true]) {
      const found = search({ fleet: sets, catalog: [], within: true, hours, missKm, byPairs });
      expectSameEncounters(found, expected, 0);
    }
  });

  it('a fleet against a catalog', () => {
    const sets = syntheticCatalog({ seed: 16, count: 320, epochMs: START_MS });
    const fleet = sets.slice(0, 20);
    const catalog = sets.slice(20);
    const expected = bruteForceEncounters({
      first: fleet,
      second: catalog,
      startMs: START_MS,
      endMs: START_MS + 12 * HOUR_MS,
      missKm: 60,
    });
    expect(expected.length).toBeGreaterThan(20);
    for (const byPairs of [false, true]) {
      const found = search({ fleet, catalog, within: false, hours: 12, missKm: 60, byPairs });
      expectSameEncounters(found, expected, fleet.length);
    }
  });

  it('a fleet against eccentric orbits, which are followed only while they are low', () => {
    const fleet = syntheticCatalog({ seed: 18, count: 40, epochMs: START_MS, mix: { ...NONE, low: 1 } });
    const catalog = syntheticCatalog({
      seed: 19,
      count: 240,
      epochMs: START_MS,
      mix: { ...NONE, eccentric: 0.97, decaying: 0.03 },
    });
    const expected = bruteForceEncounters({
      first: fleet,
      second: catalog,
      startMs: START_MS,
      endMs: START_MS + 13 * HOUR_MS,
      missKm: 300,
    });
    expect(expected.length).toBeGreaterThan(60);
    for (const forced of [{}, { stepS: 60 }, { stepS: 300 }]) {
      const found = search({
        fleet,
        catalog,
        within: false,
        hours: 13,
        missKm: 300,
        byPairs: false,
        ...forced,
      });
      expectSameEncounters(found, expected, fleet.length);
    }
  });

  describe('in any way, within a few kilometers', () => {
    // Pairs that pass close on purpose: each leader, and one that comes by at a time and a distance of its own.
    const random = seededRandom(17);
    const leaders = syntheticCatalog({ seed: 17, count: 60, epochMs: START_MS });
    const passing = leaders.flatMap((leader) => {
      try {
        return [
          setPassing(
            leader,
            {
              tcaMs: START_MS + random.between(0.3, 3.7) * HOUR_MS,
              missM: random.between(0, 4900),
              missAngleDeg: random.between(0, 360),
              crossingDeg: random.between(2, 178),
            },
            leader,
          ),
        ];
      } catch {
        // No orbit of SGP4 could be fitted, a decaying leader for instance.
        return [];
      }
    });
    const sets = [...leaders, ...passing];
    const expected = bruteForceEncounters({
      first: sets,
      startMs: START_MS,
      endMs: START_MS + 4 * HOUR_MS,
      missKm: 5,
    });

    it.each([{ stepS: 20 }, { stepS: 36 }, { stepS: 60 }, { stepS: 120 }, { stepS: 300 }, { byPairs: true }])(
      '%j',
      (forced) => {
        expect(expected.length).toBeGreaterThan(30);
        expectSameEncounters(
          search({ fleet: sets, catalog: [], within: true, hours: 4, missKm: 5, ...forced }),
          expected,
          0,
        );
      },
    );

    it('to the last bit as the plain path does: every pair looked at all the time', () => {
      const plain = everyMinimum(sets, 4, 5);
      expect(plain.length).toBe(expected.length);
      for (const forced of [{}, { stepS: 36 }, { stepS: 120 }, { stepS: 300 }, { byPairs: true }]) {
        const found = search({ fleet: sets, catalog: [], within: true, hours: 4, missKm: 5, ...forced });
        const timesOf = (approaches: readonly ClosestApproach[]) =>
          approaches.map(({ first, second, tcaMs }) => ({ first, second, tcaMs }));
        expect(timesOf(found)).toEqual(timesOf(plain));
        found.forEach(({ missKm }, k) => {
          expect(Math.abs(missKm - plain[k].missKm)).toBeLessThan(1e-7);
        });
      }
    });
  });
});

/** No index, no bound, no track: the minima of all pairs from samples of SGP4. */
function everyMinimum(sets: readonly ElementSet[], hours: number, missKm: number): ClosestApproach[] {
  const records = sgp4RecordsOf(sets);
  const objects = sets.map((_, place) => createPositionSamples({ records, place }, SLOW_GRID_MS));
  const endMs = START_MS + hours * HOUR_MS;
  const found: ClosestApproach[] = [];
  for (let fromMs = START_MS; fromMs < endMs; fromMs += 300_000) {
    objects.forEach((object1, first) => {
      objects.slice(first + 1).forEach((object2, k) => {
        for (const minimum of slowMinima(object1, object2, fromMs, fromMs + 300_000)) {
          if (minimum.missKm <= missKm && minimum.tcaMs < endMs)
            found.push({ first, second: first + 1 + k, ...minimum });
        }
      });
    });
  }
  return distinctApproaches(found, sets.length);
}
