import { createHash } from 'node:crypto';
import { readdirSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { CRAFTED } from '../../sample-catalogs/make-sample-catalogs.js';
import {
  freshFolder,
  ONE_WORKER,
  type Outcome,
  type Row,
  rowsOf,
  runCommand,
  runRecordOf,
  SAMPLES,
  setsInText,
  smallerCatalog,
  wholeRunIn,
} from '../cli/real-command.js';

/*
 * Three nights of the real command with a history: what changed from one to the next, and what stays.
 * The second night has a shorter window and a satellite less, so that every kind of change comes up.
 */

const folder = freshFolder();
afterAll(folder.remove);
const at = (name: string) => join(folder.path, name);

const LEFT_OUT = '98018';

let first: Row[];
let second: Row[];
let changes: Row[];
let nights: Outcome[];
/** Orbital period by catalog number on the second night, seconds. */
const periods = new Map<string, number>();

async function night(name: string, start: string, days: number, ...more: string[]): Promise<Outcome> {
  const outcome = await runCommand([
    ...['screen', '--fleet', at(`${name}-fleet.tle`), '--catalog', at(`${name}-catalog.tle`)],
    ...['--start', start, '--days', String(days), '--out', at('tonight'), '--history', at('runs')],
    ...[...ONE_WORKER, ...more],
  ]);
  expect(outcome.status, outcome.stderr).toBe(0);
  return outcome;
}

beforeAll(async () => {
  const fleet = readFileSync(join(SAMPLES, 'fleet.tle'), 'utf8');
  writeFileSync(at('1-fleet.tle'), readFileSync(join(SAMPLES, 'night-1/fleet.tle')));
  writeFileSync(at('1-catalog.tle'), smallerCatalog(join(SAMPLES, 'night-1/catalog.tle')));
  const kept = setsInText(fleet).filter(({ number }) => number !== LEFT_OUT);
  writeFileSync(at('2-fleet.tle'), kept.map(({ text }) => text).join(''));
  writeFileSync(at('2-catalog.tle'), smallerCatalog(join(SAMPLES, 'catalog.tle')));
  const written = [...kept, ...setsInText(readFileSync(at('2-catalog.tle'), 'utf8'))];
  for (const { number, text } of written) {
    const meanMotion = /^2 .{50}(.{11})/m.exec(text)?.[1];
    const designator = number.startsWith('W') ? `30${number.slice(1)}` : number;
    periods.set(designator, 86_400 / Number(meanMotion));
  }

  nights = [await night('1', '2026-11-30T00:00:00Z', 5)];
  first = rowsOf(at('tonight/conjunctions.csv'));
  nights.push(await night('2', '2026-12-01T00:00:00Z', 3));
  second = rowsOf(at('tonight/conjunctions.csv'));
  changes = rowsOf(at('tonight/changes.csv'));
});

const pairOf = (row: Row) => `${row.object1_designator} ${row.object2_designator}`;

test('the first night has nothing to compare with, and says so', () => {
  expect(nights[0].stdout).toMatch(/^No earlier run to compare with: every encounter counts as new\.\n\n/);
  const kept = rowsOf(at('runs/2026-11-30T00-00-00Z-0001/changes.csv'));
  expect(kept.length).toBe(first.length);
  expect(new Set(kept.map((row) => row.change))).toEqual(new Set(['new']));
});

test('each pass of either night is matched and judged as by plain counting', () => {
  // Nearest in time, within a quarter of the shorter period: on these two nights no pass is near two others.
  const expected = new Map<string, string>();
  const unmatched = [...first];
  for (const row of second) {
    const [period1, period2] = [row.object1_designator, row.object2_designator].map(
      (designator) => periods.get(designator) ?? Number.NaN,
    );
    const quarterMs = (1000 * Math.min(period1, period2)) / 4;
    expect(quarterMs).toBeGreaterThan(0);
    const apartMs = (other: Row) => Math.abs(Date.parse(other.tca_utc) - Date.parse(row.tca_utc));
    const near = unmatched.filter((other) => pairOf(other) === pairOf(row) && apartMs(other) <= quarterMs);
    expect(near.length).toBeLessThan(2);
    if (near.length === 1) unmatched.splice(unmatched.indexOf(near[0]), 1);
    const [now, before] = [row, near[0]].map((each) => Number(each?.collision_probability));
    const ratio = Math.max(now, 1e-10) / Math.max(before, 1e-10);
    const trend = ratio >= 2 ? 'rose' : ratio <= 0.5 ? 'fell' : 'steady';
    const previous = near[0]?.tca_utc ?? '';
    expected.set(`${pairOf(row)} ${row.tca_utc} ${previous}`, previous === '' ? 'new' : trend);
  }
  for (const row of unmatched) {
    const tcaMs = Date.parse(row.tca_utc);
    const kind =
      tcaMs < Date.UTC(2026, 11, 1)
        ? 'past'
        : tcaMs > Date.UTC(2026, 11, 4)
          ? 'outside-window'
          : row.object1_designator === LEFT_OUT
            ? 'not-screened'
            : 'gone';
    expected.set(`${pairOf(row)}  ${row.tca_utc}`, kind);
  }
  const found = new Map(
    changes.map((row) => [`${pairOf(row)} ${row.tca_utc} ${row.previous_tca_utc}`, row.change]),
  );
  expect(found).toEqual(expected);
  expect(changes.length).toBe(found.size);
  expect([...new Set(found.values())].sort()).toEqual([
    'fell',
    'gone',
    'new',
    'not-screened',
    'outside-window',
    'past',
    'rose',
    'steady',
  ]);
});

test('the figures of both nights stand side by side', () => {
  const figures = ['miss_distance_m', 'collision_probability'] as const;
  for (const change of changes) {
    const now = second.find((row) => pairOf(row) === pairOf(change) && row.tca_utc === change.tca_utc);
    const before = first.find(
      (row) => pairOf(row) === pairOf(change) && row.tca_utc === change.previous_tca_utc,
    );
    for (const figure of figures) {
      expect(change[figure]).toBe(now?.[figure] ?? '');
      expect(change[`previous_${figure}`]).toBe(before?.[figure] ?? '');
    }
    expect(change.first_seen_utc).toBe(`2026-${before ? '11-30' : '12-01'}T00:00:00.000Z`);
    expect(change.runs_seen).toBe(before && now ? '2' : '1');
  }
});

/** What became of the pass of an object near a time. */
const kindOf = (number: number, tca: string) =>
  changes.find(
    (row) =>
      row.object2_designator === String(number) &&
      Math.abs(Date.parse(row.tca_utc || row.previous_tca_utc) - Date.parse(tca)) < 600_000,
  )?.change;

test('the passes that were set up to change did', () => {
  const kinds = new Map(CRAFTED.map(({ number, tca }) => [number, kindOf(number, tca)]));
  expect(kinds.get(97001)).toBe('rose');
  expect(kinds.get(97004)).toBe('new');
  expect(kinds.get(309005)).toBe('gone');
  expect(kinds.get(97006)).toBe('past');
  expect(kinds.get(309003)).toBe('steady');
  expect(kinds.get(309007)).toBe('not-screened');
});

test('the README of the sample catalogs says of them what changes.csv says', () => {
  const told = readFileSync(join(SAMPLES, 'README.md'), 'utf8').matchAll(
    /^\| [AB] \d\d .*?\((\d+)\) *\| (\S+) (\S+) *\| *\S+ *\| *\S+ *\| (\S+) *\|/gm,
  );
  const rows = [...told].map(([, number, day, time, kind]) => ({
    number: Number(number),
    tca: `${day}T${time}Z`,
    kind,
  }));
  // The slow neighbor is made apart from the others.
  expect(rows.map(({ number }) => number).sort()).toEqual(
    [...CRAFTED.map(({ number }) => number), 97009].sort(),
  );
  // One is of the satellite that is left out here, one lies after the shorter windows of these nights.
  for (const { number, tca, kind } of rows.filter((row) => ![309007, 97008].includes(row.number))) {
    expect([number, kindOf(number, tca)]).toEqual([number, kind]);
  }
});

test('a pass that rose is the first thing that the terminal shows, the likeliest first', () => {
  const risen = changes.filter((row) => row.change === 'rose');
  expect(risen.length).toBeGreaterThan(1);
  expect(changes.slice(0, risen.length)).toEqual(risen);
  const lines = nights[1].stdout.split('\n');
  risen.forEach((row, i) => {
    expect(lines[i]).toMatch(
      new RegExp(`^Rose: ${row.object1_designator} .*/ ${row.object2_designator}.*, TCA `),
    );
    const [, before, now] = /probability (\S+) -> (\S+),/.exec(lines[i]) ?? [];
    expect(Number(now) / Number(row.collision_probability)).toBeCloseTo(1, 1);
    expect(Number(before) / Number(row.previous_collision_probability)).toBeCloseTo(1, 1);
  });
  expect(lines[0]).toContain(`TCA ${risen[0].tca_utc.slice(0, 19)}Z`);
  const counted = lines[risen.length];
  expect(counted).toMatch(/^Since run 2026-11-30T00-00-00Z-0001: /);
  for (const kind of new Set(changes.map((row) => row.change))) {
    expect(counted).toContain(`${changes.filter((row) => row.change === kind).length} ${kind}`);
  }
});

test('settings in which the night differs from the one before are told below the changes', () => {
  expect(nights[1].stdout).toMatch(
    /\nSince run 2026-11-30T00-00-00Z-0001: .*\nThat run had other settings, so changes may come from these alone:\n {2}--days: 5 then, 3 now\n\n/,
  );
  expect(nights[1].stderr).toContain(
    'WARN: run 2026-11-30T00-00-00Z-0001, which this one is compared with, had other settings: --days: 5 then, 3 now; what changes.csv tells may come from these alone\n',
  );
  const changed = (run: string) => runRecordOf(at(`runs/${run}`)).settingsChanged;
  expect(changed('2026-12-01T00-00-00Z-0002')).toEqual([{ setting: 'days', previous: 5, current: 3 }]);
  expect(changed('2026-11-30T00-00-00Z-0001')).toBeNull();
  expect(nights[0].stdout + nights[0].stderr).not.toContain('settings');
});

test('the history keeps whole runs, and only as many as asked for', async () => {
  const runs = () => readdirSync(at('runs')).sort();
  expect(runs()).toEqual(['2026-11-30T00-00-00Z-0001', '2026-12-01T00-00-00Z-0002']);
  for (const run of runs()) wholeRunIn(at(`runs/${run}`), ['encounters.json']);
  expect(runRecordOf(at('tonight')).comparedWith).toBe('2026-11-30T00-00-00Z-0001');

  writeFileSync(at('objects.csv'), 'designator,name,hard_body_radius_m,maneuverable\n97061,,5,NO\n');
  await night('2', '2026-12-01T12:00:00Z', 0.5, '--keep-runs', '2', '--objects', at('objects.csv'));
  expect(runs()).toEqual(['2026-12-01T00-00-00Z-0002', '2026-12-01T12-00-00Z-0003']);
  for (const run of runs()) wholeRunIn(at(`runs/${run}`), ['encounters.json']);
  const record = wholeRunIn(at('tonight'));
  expect(record.comparedWith).toBe('2026-12-01T00-00-00Z-0002');
  // Unchanged elements: what is still to come is as it was.
  const coming = rowsOf(at('tonight/changes.csv')).filter((row) => row.tca_utc !== '');
  expect(coming.length).toBeGreaterThan(1);
  for (const row of coming)
    expect(row).toMatchObject({ change: 'steady', runs_seen: expect.stringMatching(/[23]/) });
});

test('another volume, another sigma table, and a table of objects that was changed are named with both values', async () => {
  const objects = at('objects.csv');
  const before = rowsOf(at('tonight/conjunctions.csv')).length;
  writeFileSync(objects, readFileSync(objects, 'utf8').replace(',5,', ',9,'));
  writeFileSync(
    at('sigma.csv'),
    'object_designator,perigee_min_km,perigee_max_km,eccentricity_max,inclination_min_deg,inclination_max_deg,age_d,sigma_r_m,sigma_t_m,sigma_n_m\n98003,,,,,,0,10,100,10\n',
  );
  const outcome = await night(
    ...(['2', '2026-12-01T12:00:00Z', 0.5, '--miss-km', '20'] as const),
    ...['--objects', objects, '--sigma', at('sigma.csv')],
  );
  const told = [
    '--miss-km: 5 then, 20 now',
    `--objects: ${objects} then and now, but its contents changed`,
    `--sigma: the built-in table then, ${at('sigma.csv')} now`,
  ];
  expect(outcome.stdout).toContain(
    `\nThat run had other settings, so changes may come from these alone:\n  ${told.join('\n  ')}\n\n`,
  );
  expect(outcome.stderr).toContain(told.join('; '));
  const record = runRecordOf(at('tonight'));
  const digestOf = (file: string) => createHash('sha256').update(readFileSync(file)).digest('hex');
  expect(record.settingsChanged).toEqual([
    { setting: 'miss-km', previous: 5, current: 20 },
    {
      setting: 'objects',
      previous: { file: objects, sha256: expect.stringMatching(/^[0-9a-f]{64}$/) },
      current: { file: objects, sha256: digestOf(objects) },
    },
    {
      setting: 'sigma',
      previous: null,
      current: { file: at('sigma.csv'), sha256: digestOf(at('sigma.csv')) },
    },
  ]);
  // The reason for telling it: all that is new is new by the larger distance alone.
  const fresh = rowsOf(at('tonight/changes.csv')).filter(({ change }) => change === 'new');
  expect(fresh.length).toBeGreaterThan(before);
  for (const row of fresh) expect(Number(row.miss_distance_m)).toBeGreaterThan(5000);
});
