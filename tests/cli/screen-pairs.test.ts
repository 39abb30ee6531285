import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, describe, expect, test } from 'vitest';
import type { ElementSet } from '../../src/elements/element-set.js';
import { readElementFiles } from '../../src/elements/read.js';
import { threeLineFile } from '../elements/formats.js';
import { type BruteForceEncounter, bruteForceEncounters } from '../encounters/brute-force.js';
import { syntheticCatalog, walkerShell } from '../synthetic/catalog.js';
import { freshFolder, ONE_WORKER, type Row, rowsOf, runCommand, runRecordOf } from './real-command.js';

/*
 * What is screened against what: fleet against catalog, fleet against itself, all on all; and objects that
 * fly together.
 */

const START_MS = Date.UTC(2026, 11, 1);
const DAYS = 0.4;
const MISS_KM = 60;

const folder = freshFolder();
afterAll(folder.remove);
const at = (name: string) => join(folder.path, name);

/** A small constellation whose planes cross, and a catalog around its height. */
const shell = walkerShell({
  count: 24,
  planes: 6,
  phasing: 0,
  altitudeKm: 560,
  inclinationDeg: 86,
  epochMs: START_MS - 3_600_000,
  firstDesignator: 310_000,
  namePrefix: 'OSPRY',
});
const drawn = syntheticCatalog({ seed: 51, count: 48, epochMs: START_MS, oldestDays: 1 });
const numbered = (set: ElementSet, designator: string, change: Partial<ElementSet> = {}): ElementSet => ({
  ...set,
  designator,
  name: `OF ${set.designator}`,
  ...change,
});
/** Docked to a satellite of the fleet: a hundredth of a degree ahead, one kilometer. */
const docked = numbered(shell[3], '311000', { meanAnomalyDeg: (shell[3].meanAnomalyDeg + 0.008) % 360 });
/** One object under two numbers: the very same elements. */
const twinOfFleet = numbered(shell[5], '311001');
const twinsOfCatalog = [numbered(drawn[10], '311002'), numbered(drawn[10], '311003')];
/** And a neighbor in the fleet that flies along for the whole window. */
const neighbor = numbered(shell[7], '310100', { meanAnomalyDeg: (shell[7].meanAnomalyDeg + 0.016) % 360 });

const named = (sets: readonly ElementSet[]) =>
  sets.map((set) => ({ ...set, name: set.name || `OBJECT ${set.designator}` }));
writeFileSync(at('fleet.tle'), threeLineFile(named([...shell, neighbor])));
writeFileSync(at('catalog.tle'), threeLineFile(named([...drawn, docked, twinOfFleet, ...twinsOfCatalog])));
const fleet = (await readElementFiles([at('fleet.tle')])).sets;
const catalog = (await readElementFiles([at('catalog.tle')])).sets;

type Screened = {
  readonly rows: readonly Row[];
  readonly companions: readonly string[];
  readonly stdout: string;
};

async function screened(out: string, ...what: string[]): Promise<Screened> {
  const { status, stdout, stderr } = await runCommand([
    ...['screen', ...what, '--start', '2026-12-01T00:00:00Z', '--days', String(DAYS)],
    ...['--miss-km', String(MISS_KM), '--out', at(out), ...ONE_WORKER],
  ]);
  expect(status, stderr).toBe(0);
  const rows = rowsOf(at(`${out}/conjunctions.csv`));
  const companions = rowsOf(at(`${out}/companions.csv`)).map(
    (row) => `${row.object1_designator} ${row.object2_designator}`,
  );
  // Told once, and apart from the passes.
  expect(new Set(companions).size).toBe(companions.length);
  for (const row of rows) expect(companions).not.toContain(pairOf(row));
  const together = companions.length === 1 ? '1 pair flies' : `${companions.length} pairs fly`;
  expect(stdout).toContain(`${together} together for the whole window: see companions.csv`);
  return { rows, companions, stdout };
}

const pairOf = (row: Row) => `${row.object1_designator} ${row.object2_designator}`;

const window = { startMs: START_MS, endMs: START_MS + DAYS * 86_400_000, missKm: MISS_KM };

/** Fails unless rows and brute force tell of the same, companions left out. */
function expectSame(
  { rows, companions }: Screened,
  expected: readonly (BruteForceEncounter & { readonly pair: string })[],
): void {
  const left = [...rows];
  for (const { pair, tcaMs, missKm, relativeSpeedKmPerS } of expected) {
    if (companions.includes(pair)) continue;
    const toleranceMs = relativeSpeedKmPerS > 0.1 ? 1 : 3000;
    const index = left.findIndex(
      (row) => pairOf(row) === pair && Math.abs(Date.parse(row.tca_utc) - tcaMs) <= toleranceMs,
    );
    expect(index, `missed: ${pair}, ${missKm} km, ${relativeSpeedKmPerS} km/s`).not.toBe(-1);
    expect(Math.abs(Number(left[index].miss_distance_m) / 1000 - missKm)).toBeLessThan(1e-5);
    left.splice(index, 1);
  }
  expect(left.map(pairOf), 'listed, but not found by brute force').toEqual([]);
}

/** By number, so that object 1 of a pair is the one with the lower. */
const everything = [...fleet, ...catalog].sort((a, b) => Number(a.designator) - Number(b.designator));
const isOwn = new Set(fleet.map(({ designator }) => designator));

/** Encounters of all with all, with the pair as it is named there, and as it is with the fleet first. */
const encounters = bruteForceEncounters({ first: everything, ...window }).map((encounter) => {
  const [low, high] = [everything[encounter.i].designator, everything[encounter.j].designator];
  const own = [low, high].filter((designator) => isOwn.has(designator)).length;
  return {
    ...encounter,
    own,
    pair: `${low} ${high}`,
    pairOfFleet: isOwn.has(high) && own === 1 ? `${high} ${low}` : `${low} ${high}`,
  };
});
const within = encounters.filter(({ own }) => own === 2);
const between = encounters
  .filter(({ own }) => own === 1)
  .map((encounter) => ({ ...encounter, pair: encounter.pairOfFleet }));

describe.concurrent('against brute force', () => {
  test('fleet against catalog, with an object docked and one under a second number', async () => {
    const result = await screened('plain', '--fleet', at('fleet.tle'), '--catalog', at('catalog.tle'));
    expect(result.companions).toEqual(expect.arrayContaining(['310003 311000', '310005 311001']));
    expect(between.length).toBeGreaterThan(20);
    expectSame(result, between);
    const twin = rowsOf(at('plain/companions.csv')).find((row) => pairOf(row) === '310005 311001');
    expect(twin).toMatchObject({
      closest_distance_m: '0.000',
      farthest_distance_m: '0.000',
      fastest_relative_speed_m_s: '0.0000',
    });
  });

  test('the fleet against itself alone, and with a catalog', async () => {
    const alone = await screened('alone', '--fleet', at('fleet.tle'), '--within-fleet');
    expect(alone.companions).toEqual(['310007 310100']);
    expect(within.length).toBeGreaterThan(20);
    expectSame(alone, within);
    expect(alone.stdout).toContain('Catalog: no element sets\n');

    const both = await screened(
      'both',
      ...['--fleet', at('fleet.tle'), '--within-fleet', '--catalog', at('catalog.tle')],
    );
    expect(both.companions).toEqual(expect.arrayContaining(['310003 311000', '310007 310100']));
    expectSame(both, [...within, ...between]);
  });

  test('a catalog of the fleet alone is no all-clear', async () => {
    const { status, stdout, stderr } = await runCommand([
      ...['screen', '--fleet', at('fleet.tle'), '--catalog', at('fleet.tle'), '--out', at('itself')],
      ...['--start', '2026-12-01T00:00:00Z', '--days', '0.01'],
    ]);
    expect(status, stderr).toBe(0);
    expect(stdout).toMatch(/^No conjunctions in the window\.\n/);
    expect(stderr).toContain('WARN: every object of the catalog is one of the fleet, so there is nothing to');
  });

  test('all on all: every pair once', async () => {
    const result = await screened('all', '--all-on-all', '--catalog', at('fleet.tle'), at('catalog.tle'));
    const twins = ['310003 311000', '310005 311001', '310007 310100', '311002 311003'];
    expect(result.companions).toEqual(expect.arrayContaining(twins));
    // The object behind the two numbers of the catalog is there a third time.
    expect(result.companions).toEqual(
      expect.arrayContaining([`${drawn[10].designator} 311002`, `${drawn[10].designator} 311003`]),
    );
    expectSame(result, encounters);
    const record = runRecordOf(at('all'));
    expect(record.counts).toMatchObject({ primaries: 77, others: 0 });
    expect(record.elementAges.fleet).toBeNull();
    expect(result.stdout).not.toContain('Fleet:');
  });
});
