import { sgp4 } from 'satellite.js';
import { describe, expect, it } from 'vitest';
import type { ElementSet } from '../../../src/elements/element-set.js';
import { sgp4RecordOf } from '../../../src/elements/sgp4-record.js';
import { pairKey } from '../../../src/encounters/search-problem.js';
import { loadSgp4 } from '../../../src/ephemeris/sgp4-module.js';
import { sgp4RecordsOf } from '../../../src/ephemeris/sgp4-records.js';
import { findFlyingAlong, probablySame } from '../../../src/jobs/launch/flying-along.js';
import { liftoffSearch } from '../../../src/jobs/launch/liftoff-search.js';
import { pairRows } from '../../../src/jobs/launch/pair-rows.js';
import {
  type ObjectKnowledge,
  type ScreenedObject,
  screenedObjects,
} from '../../../src/jobs/screened-object.js';
import { defaultSigmaTable } from '../../../src/uncertainty/default-sigma-table.js';
import { syntheticCatalog } from '../../synthetic/catalog.js';
import { atEpoch } from '../../synthetic/mean-elements.js';
import { batchSet, RELEASE_MS } from './batch-sets.js';

await loadSgp4();

const HOUR_MS = 3_600_000;
const KNOWLEDGE: ObjectKnowledge = {
  listed: undefined,
  sigmas: undefined,
  defaultSigmas: defaultSigmaTable(),
};
const WINDOW = { startMs: RELEASE_MS, endMs: RELEASE_MS + 72 * HOUR_MS };
const VOLUME = { volume: { shape: 'SPHERE', missKm: 25 }, maxAgeDays: 30, onlyProbability: true } as const;

/** Ten objects a step apart, and the same ten under numbers, with the errors of another fit. */
const batchSets = Array.from(
  { length: 10 },
  (_, k) =>
    batchSet(`B-${k}`, { meanAnomalyDeg: 254 + 0.002 * k, meanMotionRevPerDay: 15.8 + 0.0001 * k }).set,
);
const catalogSets = batchSets.map((set, k): ElementSet => {
  const later = atEpoch({ ...set, meanAnomalyDeg: set.meanAnomalyDeg + 0.0004 }, RELEASE_MS + 7 * HOUR_MS);
  return { ...(later as ElementSet), designator: String(90_001 + k), name: '' };
});
const batch = screenedObjects(batchSets, KNOWLEDGE).map((object) => ({ ...object, validFromMs: RELEASE_MS }));
const others = screenedObjects(
  [
    ...syntheticCatalog({ seed: 5, count: 300, epochMs: RELEASE_MS, firstDesignator: 300_001 }),
    ...catalogSets,
  ],
  KNOWLEDGE,
);

type Components = { readonly x: number; readonly y: number; readonly z: number };

function apart(a: Components, b: Components): number {
  return Math.hypot(a.x - b.x, a.y - b.y, a.z - b.z);
}

/** The rule in plain words of its own: five minutes apart for a day, and what rests in the orbiting frame taken off. */
function isTogether(a: ScreenedObject, b: ScreenedObject, missKm: number): boolean {
  const [record1, record2] = [sgp4RecordOf(a.set), sgp4RecordOf(b.set)];
  let closest = Number.POSITIVE_INFINITY;
  for (let ms = RELEASE_MS; ms <= RELEASE_MS + 24 * HOUR_MS; ms += HOUR_MS / 12) {
    const one = sgp4(record1, (ms - a.set.epochMs) / 60_000);
    const two = sgp4(record2, (ms - b.set.epochMs) / 60_000);
    if (one === null || two === null) return false;
    const km = apart(one.position, two.position);
    const kmPerS = apart(one.velocity, two.velocity);
    // 15.8 revolutions a day, and a tenth.
    if (km > 2 * missKm || kmPerS > 0.01 + 1.1 * ((2 * Math.PI * 15.8) / 86_400) * km) return false;
    closest = Math.min(closest, km);
  }
  return closest <= missKm;
}

describe('objects that the catalog holds already', () => {
  const search = liftoffSearch([0], batch, others, WINDOW, VOLUME);
  const same = probablySame(search.flying, search.objects);
  const name = (index: number) => search.objects[index].designator;

  it('are told once each, with the object that they are', () => {
    expect(same.map(({ first, second }) => [name(first), name(second)]).sort()).toEqual(
      batchSets.map(({ designator }, k) => [designator, String(90_001 + k)]),
    );
  });

  it('have no encounters with any of the batch', () => {
    const { skippedPairs, objects } = search.plan;
    const expected = search.objects.flatMap(({ designator }, second) =>
      /^9/.test(designator)
        ? Array.from({ length: objects.primaryCount }, (_, first) =>
            pairKey(first, second, search.objects.length),
          )
        : [],
    );
    expect(expected).toHaveLength(100);
    expect([...skippedPairs].sort()).toEqual(expected.sort());
  });

  it('stand with the others of the batch in batch-pairs.csv, once each pair', () => {
    const along = [...new Set(search.flying.map(({ second }) => search.objects[second]))];
    expect(along).toHaveLength(10);
    const rows = pairRows(batch, along, { ...WINDOW, limitKm: 25 }, (designator, other) =>
      same.some(({ first, second }) => name(first) === designator && search.objects[second] === other),
    );
    expect(rows).toHaveLength(45 + 90);
    expect(
      new Set(rows.map(({ object1, object2 }) => `${object1.designator} ${object2.designator}`)).size,
    ).toBe(135);
    expect(rows.filter(({ remarks }) => remarks.includes('flies-along'))).toHaveLength(90);
  });
});

describe('an object that flies along', () => {
  const flyingAlong = (objects: readonly ScreenedObject[]) =>
    findFlyingAlong(objects, sgp4RecordsOf(objects.map(({ set }) => set)), 1, 25);
  const neighbor = (changes: Partial<ElementSet>) =>
    screenedObjects([{ ...batchSets[0], designator: '90001', ...changes }], KNOWLEDGE)[0];
  const found = (other: ScreenedObject) =>
    flyingAlong([{ ...batch[0], validToMs: WINDOW.endMs }, other]).length;

  it.each([
    ['a kilometer ahead', { meanAnomalyDeg: 254.01 }, 1],
    ['beyond the screening distance', { meanAnomalyDeg: 254.3 }, 0],
    ['that drifts by 20 km a day', { meanMotionRevPerDay: 15.8005 }, 1],
    ['that is 100 km away after a day', { meanMotionRevPerDay: 15.8025 }, 0],
    ['in a plane a degree off', { inclinationDeg: 54.4 }, 0],
    ['the other way around', { inclinationDeg: 126.6 }, 0],
  ])('%s', (_, changes, expected) => {
    expect(found(neighbor(changes))).toBe(expected);
  });

  it('is found by the quick test of orbits wherever the plain search finds it', () => {
    // Neighbors of one orbit, off by what a companion may be off, in every element.
    const sets = Array.from({ length: 400 }, (_, k) => {
      const off = (period: number) => Math.sin(k * period);
      return {
        ...batchSets[0],
        designator: String(300_001 + k),
        meanAnomalyDeg: 254 + 0.25 * off(1.7),
        rightAscensionDeg: 203.5 + 0.05 * off(2.3),
        inclinationDeg: 53.4 + 0.06 * off(3.1),
        eccentricity: 0.0006 + 0.0005 * off(0.7),
        meanMotionRevPerDay: 15.8 + 0.002 * off(5.9),
      };
    });
    const many = screenedObjects(sets, KNOWLEDGE);
    const first = { ...batch[0], validToMs: WINDOW.endMs };
    const expected = many.filter((other) => isTogether(first, other, 25)).map(({ designator }) => designator);
    expect(expected.length).toBeGreaterThan(20);
    expect(expected.length).toBeLessThan(380);
    const found = flyingAlong([first, ...many]);
    expect(found.map(({ second }) => many[second - 1].designator)).toEqual(expected);
  });

  it('of a slipped liftoff is a matter of that liftoff alone', () => {
    const search = liftoffSearch([-600_000, 0, 600_000], batch, others, WINDOW, VOLUME);
    expect(new Set(search.flying.map(({ first }) => Math.floor(first / batch.length)))).toEqual(new Set([1]));
    const copies = search.plan.skippedPairs.map((key) => Math.floor(key / search.objects.length));
    expect(new Set(copies.map((first) => Math.floor(first / batch.length)))).toEqual(new Set([1]));
    expect(search.plan.skippedPairs).toHaveLength(100);
  });
});
