import { readdirSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import { sgp4 } from 'satellite.js';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { CAUTION } from '../../src/caution.js';
import type { ElementSet } from '../../src/elements/element-set.js';
import { readElementFiles } from '../../src/elements/read.js';
import { selectSets } from '../../src/elements/select.js';
import { sgp4RecordOf } from '../../src/elements/sgp4-record.js';
import { type BruteForceEncounter, bruteForceEncounters } from '../encounters/brute-force.js';
import {
  freshFolder,
  type Outcome,
  type ParsedRecord,
  type Row,
  rowsOf,
  runCommand,
  runRecordOf,
  SAMPLES,
} from './real-command.js';

/*
 * One screening of the sample catalogs by the real command, looked at from all sides.
 */

const START_MS = Date.UTC(2026, 11, 1);
const DAY_MS = 86_400_000;
/** Wider than usual, for more encounters to compare. */
const MISS_KM = 12;
const FLEET = join(SAMPLES, 'fleet.tle');
const CATALOG = join(SAMPLES, 'catalog.tle');

/** Loaders go by position: these stand first and in this order for good. */
const FIRST_COLUMNS = [
  'rank',
  'tca_utc',
  'object1_designator',
  'object1_name',
  'object2_designator',
  'object2_name',
  'miss_distance_m',
  'relative_speed_m_s',
  'relative_position_r_m',
  'relative_position_t_m',
  'relative_position_n_m',
  'relative_velocity_r_m_s',
  'relative_velocity_t_m_s',
  'relative_velocity_n_m_s',
  'collision_probability',
  'collision_probability_method',
  'collision_probability_max',
  'mahalanobis_distance',
  'hard_body_radius_m',
  'object1_sigma_r_m',
  'object1_sigma_t_m',
  'object1_sigma_n_m',
  'object2_sigma_r_m',
  'object2_sigma_t_m',
  'object2_sigma_n_m',
  'object1_element_age_d',
  'object2_element_age_d',
  'remarks',
  'caution',
];

const folder = freshFolder();
const out = join(folder.path, 'tonight');
afterAll(folder.remove);

let outcome: Outcome;
let rows: Row[];
let record: ParsedRecord;
let fleet: readonly ElementSet[];
let catalog: readonly ElementSet[];

beforeAll(async () => {
  outcome = await runCommand([
    'screen',
    ...['--fleet', FLEET, '--catalog', CATALOG, '--objects', join(SAMPLES, 'objects.csv')],
    ...['--start', '2026-12-01T00:00:00Z', '--days', '1', '--miss-km', String(MISS_KM), '--out', out],
  ]);
  rows = rowsOf(join(out, 'conjunctions.csv'));
  record = runRecordOf(out);
  const [own, others] = [await readElementFiles([FLEET]), await readElementFiles([CATALOG])];
  ({ fleet, catalog } = selectSets({ fleet: own.sets, catalog: others.sets, startMs: START_MS }));
});

const text = (name: string) => readFileSync(join(out, name), 'utf8');
const numbers = (row: Row, ...names: string[]) => names.map((name) => Number(row[name]));

test('it ends well, says so on standard output alone, and leaves five files and no lock', () => {
  expect(outcome.status).toBe(0);
  expect(outcome.stdout).toMatch(/^The first 15 of \d+ conjunctions, by collision probability:\n/);
  expect(outcome.stdout.endsWith(`\n${CAUTION}\n`)).toBe(true);
  expect(outcome.stderr).not.toContain(CAUTION);
  expect(outcome.stderr.split('\n').slice(0, -1)).toEqual([
    expect.stringMatching(/^\[\S+Z\] WARN: 1 of 2825 catalog element sets are further than 30 days/),
    expect.stringMatching(/^\[\S+Z\] INFO: searching 2026-12-01T00:00:00.000Z to 2026-12-02T00:00:00.000Z: /),
    expect.stringMatching(
      /^\[\S+Z\] INFO: finished: \d+ conjunctions, highest probability 3\.\dE-04; results in \S+tonight$/,
    ),
  ]);
  expect(readdirSync(folder.path)).toEqual(['tonight']);
  expect(readdirSync(out).sort()).toEqual([
    'companions.csv',
    'conjunctions.csv',
    'run.json',
    'sensitivity.csv',
    'unused-elements.csv',
  ]);
});

test('the header is the documented one, new columns behind it', () => {
  const header = text('conjunctions.csv').split('\r\n')[0].split(',');
  expect(header.slice(0, 29)).toEqual(FIRST_COLUMNS);
  expect(header.slice(29)).toEqual([
    'collision_probability_foster',
    'pair_probability',
    'screen_entry_utc',
    'screen_exit_utc',
  ]);
});

test('no cell, line or value is NaN, infinite or undefined', () => {
  for (const name of readdirSync(out)) {
    expect(text(name), name).not.toMatch(/NaN|Infinity|undefined|\[object/);
  }
  expect(outcome.stdout + outcome.stderr).not.toMatch(/NaN|Infinity|undefined|\[object/);
  for (const row of rows) {
    for (const name of FIRST_COLUMNS.slice(6).filter((each) => !/method|remarks|caution/.test(each))) {
      expect(row[name], name).toMatch(/^-?\d+(\.\d+)?(E[+-]\d\d+)?$/);
    }
    expect(row.tca_utc).toMatch(/^2026-12-01T\d\d:\d\d:\d\d\.\d{3}Z$/);
    expect(row.caution).toBe(CAUTION);
  }
});

test('ranks count from 1, by probability from high to low', () => {
  expect(rows.length).toBeGreaterThan(80);
  rows.forEach((row, i) => {
    expect(row.rank).toBe(String(i + 1));
    if (i === 0) return;
    const [before, here] = [rows[i - 1], row].map((each) => numbers(each, 'collision_probability')[0]);
    expect(here).toBeLessThanOrEqual(before);
    if (here === before) {
      expect(Number(row.miss_distance_m)).toBeGreaterThanOrEqual(Number(rows[i - 1].miss_distance_m));
    }
  });
});

/** Fails unless both lists tell of the same encounters: pair, time and distance. */
function expectSame(found: readonly Row[], expected: readonly BruteForceEncounter[], second: typeof catalog) {
  const left = [...found];
  for (const { i, j, tcaMs, missKm, relativeSpeedKmPerS } of expected) {
    // The distance of a slow pair hardly changes around its minimum: rounding in SGP4 moves the time by seconds.
    const toleranceMs = relativeSpeedKmPerS > 0.1 ? 1 : 3000;
    const index = left.findIndex(
      (row) =>
        row.object1_designator === fleet[i].designator &&
        row.object2_designator === second[j].designator &&
        Math.abs(Date.parse(row.tca_utc) - tcaMs) <= toleranceMs,
    );
    expect(index, `missed: ${fleet[i].designator} ${second[j].designator} ${missKm} km`).not.toBe(-1);
    expect(Math.abs(Number(left[index].miss_distance_m) / 1000 - missKm)).toBeLessThan(1e-5);
    left.splice(index, 1);
  }
  expect(left, 'in the file, but not found by brute force').toEqual([]);
}

test('the file holds every encounter that brute force finds, and no other', () => {
  const companions = new Set(
    rowsOf(join(out, 'companions.csv')).map((row) => `${row.object1_designator} ${row.object2_designator}`),
  );
  expect(companions).toEqual(new Set(['98007 97053']));
  const apart = ({ i, j }: BruteForceEncounter, second: typeof catalog) =>
    !companions.has(`${fleet[i].designator} ${second[j].designator}`);

  // All objects for the first three hours, and for the whole day every twelfth and those set up on purpose.
  const morningMs = START_MS + (3 / 24) * DAY_MS;
  const early = bruteForceEncounters({
    first: fleet,
    second: catalog,
    startMs: START_MS,
    endMs: morningMs,
    missKm: MISS_KM,
    stepS: 20,
  }).filter((encounter) => apart(encounter, catalog));
  expect(early.length).toBeGreaterThan(7);
  expectSame(
    rows.filter((row) => Date.parse(row.tca_utc) <= morningMs),
    early,
    catalog,
  );

  const some = catalog.filter(({ designator }, i) => i % 12 === 3 || /^(97|3090)\d/.test(designator));
  const chosen = new Set(some.map(({ designator }) => designator));
  const wholeDay = bruteForceEncounters({
    first: fleet,
    second: some,
    startMs: START_MS,
    endMs: START_MS + DAY_MS,
    missKm: MISS_KM,
    stepS: 20,
  }).filter((encounter) => apart(encounter, some));
  expect(wholeDay.length).toBeGreaterThan(15);
  expectSame(
    rows.filter((row) => chosen.has(row.object2_designator)),
    wholeDay,
    some,
  );
});

test('each row follows from the two element sets at its time', () => {
  const byDesignator = new Map([...fleet, ...catalog].map((set) => [set.designator, set]));
  const stateOf = (designator: string, tcaMs: number) => {
    const set = byDesignator.get(designator) as ElementSet;
    const state = sgp4(sgp4RecordOf(set), (tcaMs - set.epochMs) / 60_000);
    if (state === null) throw new Error(`no state of ${designator}`);
    const { position: p, velocity: v } = state;
    return { p: [p.x, p.y, p.z], v: [v.x, v.y, v.z], ageDays: (tcaMs - set.epochMs) / DAY_MS };
  };
  const minus = (a: number[], b: number[]) => a.map((x, k) => 1000 * (x - b[k]));
  const cross = (a: number[], b: number[]) => [
    a[1] * b[2] - a[2] * b[1],
    a[2] * b[0] - a[0] * b[2],
    a[0] * b[1] - a[1] * b[0],
  ];
  const along = (a: number[], axis: number[]) =>
    a.reduce((sum, x, k) => sum + x * axis[k], 0) / Math.hypot(...axis);
  for (const row of rows) {
    const tcaMs = Date.parse(row.tca_utc);
    const one = stateOf(row.object1_designator, tcaMs);
    const two = stateOf(row.object2_designator, tcaMs);
    const normal = cross(one.p, one.v);
    const axes = [one.p, cross(normal, one.p), normal];
    const speed = Math.hypot(...minus(two.v, one.v));
    // The time in the row is rounded to a millisecond, of which the objects move apart in half a one.
    const slack = 0.001 + 0.0006 * speed;
    numbers(row, 'relative_position_r_m', 'relative_position_t_m', 'relative_position_n_m').forEach(
      (figure, k) => {
        expect(Math.abs(figure - along(minus(two.p, one.p), axes[k]))).toBeLessThan(slack);
      },
    );
    numbers(row, 'relative_velocity_r_m_s', 'relative_velocity_t_m_s', 'relative_velocity_n_m_s').forEach(
      (figure, k) => {
        expect(Math.abs(figure - along(minus(two.v, one.v), axes[k]))).toBeLessThan(0.05);
      },
    );
    expect(Math.abs(Number(row.relative_speed_m_s) - speed)).toBeLessThan(0.05);
    const [r, t, n] = numbers(row, 'relative_position_r_m', 'relative_position_t_m', 'relative_position_n_m');
    expect(Math.abs(Math.hypot(r, t, n) - Number(row.miss_distance_m))).toBeLessThan(0.002);
    expect(Math.abs(Number(row.object1_element_age_d) - one.ageDays)).toBeLessThan(0.6e-4);
    expect(Math.abs(Number(row.object2_element_age_d) - two.ageDays)).toBeLessThan(0.6e-4);
  }
});

test('every record of every file is accounted for, on the terminal and in run.json', () => {
  const sets = (path: string) => readFileSync(path, 'utf8').match(/^1 /gm)?.length;
  const [own, others] = record.inputs.elements;
  expect(own).toMatchObject({ file: FLEET, read: 36, used: 36, superseded: 0, rejected: 0 });
  // Of the catalog: five older sets, the fleet's own 36, six damaged ones.
  expect(others).toMatchObject({ file: CATALOG, read: sets(CATALOG), superseded: 41, rejected: 6 });
  expect(others.used).toBe(others.read - 41 - 6);
  const lines = [
    ...outcome.stdout.matchAll(
      /^ +(\d+) read = +(\d+) used \+ +(\d+) superseded \+ +(\d+) rejected {2}(.*)$/gm,
    ),
  ];
  expect(lines.map(([, ...cells]) => cells)).toEqual([
    [own.read, own.used, own.superseded, own.rejected, FLEET].map(String),
    [others.read, others.used, others.superseded, others.rejected, CATALOG].map(String),
    [own.read + others.read, own.used + others.used, 41, 6, 'in all'].map(String),
  ]);
  expect(record.counts).toMatchObject({
    primaries: 36,
    others: others.used,
    failedInWindow: 1,
    encounters: rows.length,
    companionPairs: 1,
    messages: 0,
  });
  expect(outcome.stdout).toContain(`The first 15 of ${rows.length} conjunctions`);
});

test('unused-elements.csv shows every set that was not used, where it stands and why', () => {
  const unused = rowsOf(join(out, 'unused-elements.csv'));
  const reasons = (reason: string) => unused.filter((row) => row.reason === reason);
  expect(reasons('rejected').map((row) => row.designator)).toEqual([
    '309031',
    '309032',
    '309033',
    '309034',
    '309036',
    '309035',
  ]);
  expect(reasons('superseded').length).toBe(41);
  expect(reasons('failed').map((row) => row.designator)).toEqual(['301272']);
  expect(unused.length).toBe(48);
  const lines = readFileSync(CATALOG, 'utf8').split('\n');
  for (const row of unused) {
    expect(row.file).toBe(CATALOG);
    const at = Number(row.line) - 1;
    const shown = row.text.split('\n');
    expect(lines.slice(at, at + shown.length)).toEqual(shown);
    expect(row.detail).not.toBe('');
    expect(row.caution).toBe(CAUTION);
  }
  // Decayed three hours before the window: nothing of it was screened.
  expect(reasons('failed')[0]).toMatchObject({
    failed_at_utc: '',
    detail: expect.stringMatching(/no state at 2026-12-01T00:00:00.000Z, .*: not screened$/),
  });
});

test('sensitivity.csv goes row by row with the conjunctions', () => {
  const sensitivity = rowsOf(join(out, 'sensitivity.csv'));
  expect(sensitivity.length).toBe(rows.length);
  sensitivity.forEach((row, i) => {
    for (const name of ['rank', 'tca_utc', 'object1_designator', 'object2_designator']) {
      expect(row[name]).toBe(rows[i][name]);
    }
    expect(row.collision_probability_once_sigma).toBe(rows[i].collision_probability_foster);
    expect(row.collision_probability_peak).toBe(rows[i].collision_probability_max);
    const [half, once, twice, peak, scale] = numbers(
      row,
      'collision_probability_half_sigma',
      'collision_probability_once_sigma',
      'collision_probability_twice_sigma',
      'collision_probability_peak',
      'peak_sigma_scale',
    );
    expect(peak * 1.00001).toBeGreaterThanOrEqual(Math.max(half, once, twice));
    // A single peak over the scale: on its far side the probability falls.
    if (scale <= 0.5) expect(half).toBeGreaterThanOrEqual(once);
    if (scale >= 2) expect(twice).toBeGreaterThanOrEqual(once);
    expect(row.direction.startsWith('diluted')).toBe(rows[i].remarks.split(' ').includes('diluted'));
  });
});

test('run.json tells what was asked, of which bytes, and the highest probability', () => {
  expect(record).toMatchObject({
    program: 'wideberth',
    command: 'screen',
    caution: CAUTION,
    window: { startUtc: '2026-12-01T00:00:00.000Z', endUtc: '2026-12-02T00:00:00.000Z', days: 1 },
    options: { fleet: [FLEET], catalog: [CATALOG], days: 1, 'miss-km': MISS_KM, out, top: 15 },
    comparedWith: null,
    alert: { reached: false },
    elementAges: { fleet: { objects: 36 }, catalog: { objects: 2825, worstDesignator: '309021' } },
  });
  expect(record.alert.highestProbability).toBeCloseTo(Number(rows[0].collision_probability), 8);
});
