import { beforeAll, describe, expect, it } from 'vitest';
import type { ElementSet } from '../../src/elements/element-set.js';
import { type ClosestApproach, distinctApproaches } from '../../src/encounters/closest-approach.js';
import { slabCount } from '../../src/encounters/search-problem.js';
import { createSlabSearcher, searchSlab } from '../../src/encounters/search-slab.js';
import { loadSgp4 } from '../../src/ephemeris/sgp4-module.js';
import { syntheticCatalog } from '../synthetic/catalog.js';
import { seededRandom } from '../synthetic/random.js';
import { searchObjectsOf } from './search-objects.js';

const START_MS = Date.UTC(2026, 11, 1);
const HOUR_MS = 3_600_000;

/** A crowd at one height, whose planes meet at all angles: the same, nearly the same, opposite and across. */
function crowd(seed: number, count: number, mostEccentricity: number): ElementSet[] {
  const random = seededRandom(seed);
  const [template] = syntheticCatalog({ seed, count: 1, epochMs: START_MS });
  const planes = [
    [53, 40],
    [53.2, 40.1],
    [127, 220],
    [126.5, 219],
    [53, 41.5],
    [98, 100],
    [82, 280],
    [81, 279],
    [0.3, 10],
    [179.8, 90],
    [90, 15],
    [90, 15.05],
  ];
  return Array.from({ length: count }, (_, k) => {
    const [inclinationDeg, rightAscensionDeg] =
      k % 3 === 0 ? [random.between(0, 180), random.between(0, 360)] : planes[k % planes.length];
    const eccentricity = mostEccentricity * random.between(0, 1) ** 2;
    return {
      ...template,
      designator: String(300_000 + k),
      epochMs: START_MS - random.between(0, 2) * 24 * HOUR_MS,
      inclinationDeg,
      rightAscensionDeg,
      argumentOfPerigeeDeg: random.between(0, 360),
      meanAnomalyDeg: random.between(0, 360),
      eccentricity,
      meanMotionRevPerDay: random.between(13.9, 14.0) * (1 - eccentricity) ** (random.between(0, 1) * 1.5),
      bstar: random.choice([0, 1e-5, 3e-4, 2e-3]),
    };
  });
}

function search(
  sets: readonly ElementSet[],
  missKm: number,
  hours: number,
  byPairs: boolean,
): ClosestApproach[] {
  const objects = searchObjectsOf(sets, sets.length);
  const rules = {
    startMs: START_MS,
    endMs: START_MS + hours * HOUR_MS,
    missKm,
    withinPrimaries: true,
    skippedPairs: new Set<number>(),
    byPairs,
  };
  const searcher = createSlabSearcher(objects, rules);
  expect(searcher.pairs === undefined).toBe(!byPairs);
  const found: ClosestApproach[] = [];
  for (let slab = 0; slab < slabCount(rules); slab++) found.push(...searchSlab(searcher, slab).approaches);
  return distinctApproaches(found, objects.count);
}

beforeAll(loadSgp4);

describe('windows from mean orbits', () => {
  it.each([
    { seed: 61, count: 260, mostEccentricity: 0.002, missKm: 60, hours: 10 },
    { seed: 62, count: 260, mostEccentricity: 0.085, missKm: 60, hours: 10 },
    { seed: 63, count: 400, mostEccentricity: 0.02, missKm: 5, hours: 26 },
  ])('hold every encounter that the grid finds: %j', ({ seed, count, mostEccentricity, missKm, hours }) => {
    const sets = crowd(seed, count, mostEccentricity);
    const onGrid = search(sets, missKm, hours, false);
    const byPairs = search(sets, missKm, hours, true);
    expect(onGrid.length).toBeGreaterThan(100);
    const left = [...byPairs];
    const missed = onGrid.filter(({ first, second, tcaMs, missKm: distanceKm }) => {
      const index = left.findIndex(
        (approach) =>
          approach.first === first &&
          approach.second === second &&
          Math.abs(approach.tcaMs - tcaMs) < 3000 &&
          Math.abs(approach.missKm - distanceKm) < 1e-5,
      );
      if (index >= 0) left.splice(index, 1);
      return index < 0;
    });
    expect(missed).toEqual([]);
    expect(left).toEqual([]);
  });
});
