import { beforeAll, describe, expect, it } from 'vitest';
import type { ElementSet } from '../../../src/elements/element-set.js';
import { loadSgp4 } from '../../../src/ephemeris/sgp4-module.js';
import { type EncounterRecords, FIELD, FIELDS } from '../../../src/jobs/encounter-records.js';
import { batchObjects } from '../../../src/jobs/launch/batch-objects.js';
import { injectionCurve } from '../../../src/jobs/launch/injection-sigma.js';
import { liftoffRows, withBestRank } from '../../../src/jobs/launch/liftoff-rows.js';
import { type LiftoffSearch, liftoffSearch, slipGroups } from '../../../src/jobs/launch/liftoff-search.js';
import type { BatchPhase } from '../../../src/jobs/launch/phases.js';
import { type ObjectKnowledge, screenedObjects } from '../../../src/jobs/screened-object.js';
import { defaultSigmaTable } from '../../../src/uncertainty/default-sigma-table.js';
import { bruteForceEncounters } from '../../encounters/brute-force.js';
import { walkerShell } from '../../synthetic/catalog.js';
import { batchSet, RELEASE_MS } from './batch-sets.js';
import { searchHere } from './search-here.js';

await loadSgp4();

const HOUR_MS = 3_600_000;
const MINUTE_MS = 60_000;
const MISS_KM = 300;
const KNOWLEDGE: ObjectKnowledge = {
  listed: undefined,
  sigmas: undefined,
  defaultSigmas: defaultSigmaTable(),
};
const INJECTION = injectionCurve({ sigmaRtnM: [200, 600, 200], growthMPerDay: 2000, isDefault: false });
const WINDOW = { startMs: RELEASE_MS, endMs: RELEASE_MS + 6 * HOUR_MS };
/** Release and climb: the second object changes sets, and both are screened from their own release on. */
const CHANGE_MS = RELEASE_MS + 3 * HOUR_MS;
const LATE_MS = RELEASE_MS + 20 * MINUTE_MS;
const SLIPS_MS = [-47, 0, 3.5, 200].map((minutes) => minutes * MINUTE_MS);

const low = batchSet('B-A').set;
const second = batchSet('B-B', { meanAnomalyDeg: 251, meanMotionRevPerDay: 15.6 }).set;
const raised = batchSet('B-B', { meanAnomalyDeg: 100, meanMotionRevPerDay: 15.2, epochMs: CHANGE_MS }).set;
const phase = (set: ElementSet, releaseMs: number, validFromMs: number, validToMs: number): BatchPhase => ({
  set,
  numberInFile: '',
  designator: set.designator,
  releaseMs,
  validFromMs,
  validToMs,
});
const PHASES = [
  phase(low, RELEASE_MS, RELEASE_MS, Number.POSITIVE_INFINITY),
  phase(second, LATE_MS, LATE_MS, CHANGE_MS),
  phase(raised, LATE_MS, CHANGE_MS, Number.POSITIVE_INFINITY),
];
/** Shells that cross the orbits of the batch. */
const catalog = [
  [330, 97, 300_001],
  [385, 70, 300_101],
  [500, 30, 300_201],
].flatMap(([altitudeKm, inclinationDeg, firstDesignator]) =>
  walkerShell({ count: 32, planes: 4, altitudeKm, inclinationDeg, firstDesignator, epochMs: RELEASE_MS }),
);

/** The slip of the brute force: of its own, by the part of a turn of the Earth. */
function slippedByHand(set: ElementSet, slipMs: number): ElementSet {
  const turns = slipMs / ((1000 * 2 * Math.PI) / 7.292115e-5);
  return {
    ...set,
    epochMs: set.epochMs + slipMs,
    rightAscensionDeg: (set.rightAscensionDeg + 360 * turns + 720) % 360,
  };
}

describe('several liftoffs in one search', () => {
  let search: LiftoffSearch;
  let records: EncounterRecords;
  beforeAll(async () => {
    search = liftoffSearch(
      SLIPS_MS,
      batchObjects(PHASES, KNOWLEDGE, INJECTION),
      screenedObjects(catalog, KNOWLEDGE),
      WINDOW,
      { volume: { shape: 'SPHERE', missKm: MISS_KM }, maxAgeDays: 30, onlyProbability: true },
    );
    records = await searchHere(search.plan);
  });

  it('find for each what brute force finds for it alone, on each set only while it holds', () => {
    const { data, size } = records;
    const found = Array.from({ length: size }, (_, k) => {
      const at = FIELDS * k;
      const other = search.objects[data[at + FIELD.second]];
      return {
        copy: data[at + FIELD.first],
        other: other.designator,
        tcaMs: data[at + FIELD.tcaMs],
        missKm: data[at + FIELD.missKm],
      };
    });
    for (const [s, slipMs] of SLIPS_MS.entries()) {
      for (const [p, { set, validFromMs, validToMs }] of PHASES.entries()) {
        const expected = bruteForceEncounters({
          first: [slippedByHand(set, slipMs)],
          second: catalog,
          startMs: validFromMs + slipMs,
          endMs: Math.min(validToMs, WINDOW.endMs) + slipMs,
          missKm: MISS_KM,
        });
        const ours = found.filter(({ copy }) => copy === s * PHASES.length + p);
        expect(ours.map(({ other }) => other)).toEqual(expected.map(({ j }) => catalog[j].designator));
        for (const [k, { tcaMs, missKm }] of expected.entries()) {
          expect(Math.abs(ours[k].tcaMs - tcaMs)).toBeLessThan(50);
          expect(Math.abs(ours[k].missKm - missKm)).toBeLessThan(1e-5);
        }
      }
    }
    expect(found.length).toBeGreaterThan(40);
  });

  it('make a row of each, with its closest and its most probable encounter', () => {
    const rows = withBestRank(
      liftoffRows(search, records, RELEASE_MS - HOUR_MS, { clearKm: 150, alertPc: undefined }),
    );
    expect(rows.map(({ slipMs }) => slipMs)).toEqual(SLIPS_MS);
    for (const [s, row] of rows.entries()) {
      const own = Array.from({ length: records.size }, (_, k) =>
        records.data.subarray(FIELDS * k, FIELDS * (k + 1)),
      ).filter((record) => Math.floor(record[FIELD.first] / PHASES.length) === s);
      expect(row.liftoffMs).toBe(RELEASE_MS - HOUR_MS + SLIPS_MS[s]);
      expect(row.encounters).toBe(own.length);
      expect(row.violations).toBe(own.filter((record) => record[FIELD.missKm] < 150).length);
      expect(row.isClear).toBe(row.violations === 0);
      expect(row.closest?.missDistanceM).toBe(1000 * Math.min(...own.map((record) => record[FIELD.missKm])));
      expect(row.mostProbable?.collisionProbability).toBe(
        Math.max(...own.map((record) => record[FIELD.probability])),
      );
    }
    expect(rows.map(({ bestRank }) => bestRank).sort()).toEqual([1, 2, 3, 4]);
  });

  it('count ages from release, also of a set with a later epoch', () => {
    for (const [k, { agesFromMs }] of search.objects.slice(0, SLIPS_MS.length * PHASES.length).entries()) {
      const { releaseMs } = PHASES[k % PHASES.length];
      expect(agesFromMs).toBe(releaseMs + SLIPS_MS[Math.floor(k / PHASES.length)]);
    }
  });

  it('are searched in groups where they are many', () => {
    expect(slipGroups([1, 2, 3], 50)).toEqual([[1, 2, 3]]);
    const groups = slipGroups(
      Array.from({ length: 1440 }, (_, k) => k),
      50,
    );
    expect(groups.map(({ length }) => length)).toEqual([...Array(23).fill(62), 14]);
    expect(slipGroups([1, 2], 100_000)).toEqual([[1], [2]]);
  });
});
