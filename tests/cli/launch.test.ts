import { readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { LAUNCH_CAUTION } from '../../src/caution.js';
import { isBatchDesignator } from '../../src/elements/batch-designator.js';
import { readElementFiles } from '../../src/elements/read.js';
import { ommRecord } from '../elements/formats.js';
import { toTwoLine } from '../synthetic/two-line.js';
import {
  freshFolder,
  ONE_WORKER,
  type Outcome,
  type Row,
  rowsOf,
  runCommand,
  SAMPLES,
  setsInText,
  smallerCatalog,
  wholeRunIn,
} from './real-command.js';
import { runInMemory } from './run-in-memory.js';

/*
 * The launch of the sample batch through the real command.
 */

const RELEASE_MS = Date.UTC(2026, 11, 5, 15, 22, 30);
const BATCH = join(SAMPLES, 'batch.tle');
const OPERATING = join(SAMPLES, 'batch-operating.tle');
const VALIDITY = join(SAMPLES, 'batch-validity.csv');
const FLEET = join(SAMPLES, 'fleet.tle');
const TIMES = ['--liftoff', '2026-12-05T14:20:00Z', '--release', '2026-12-05T15:22:30Z'];

const folder = freshFolder();
afterAll(folder.remove);
const at = (...names: string[]) => join(folder.path, ...names);

async function launch(out: string, ...args: string[]): Promise<Outcome> {
  return runCommand(['launch', '--out', out, ...ONE_WORKER, ...args], { cwd: folder.path });
}

const table = (out: string, name: string): Row[] => rowsOf(at(out, `${name}.csv`));
const text = (out: string, name: string) => readFileSync(at(out, name), 'utf8');

beforeAll(() => {
  writeFileSync(at('catalog.tle'), smallerCatalog(join(SAMPLES, 'catalog.tle')));
});

describe('the sample batch', () => {
  const against = ['--batch', BATCH, '--fleet', FLEET, '--catalog', 'catalog.tle', ...TIMES];
  const limits = ['--clear-km', '5', '--alert-pc', '1e-6'];
  let plain: Outcome;
  let slipped: Outcome;
  beforeAll(async () => {
    plain = await launch('plain', ...against, ...limits);
    slipped = await launch(
      'slipped',
      ...[...against, ...limits, '--slip-from', '-4', '--slip-to', '6', '--slip-every', '5', '--top', '0'],
    );
  });

  it('meets the objects that were put in its way, as told in the README of the samples', () => {
    // sample-catalogs/README.md: 97031 to 97036 come within 25 km of some within three days of release.
    const rows = table('plain', 'conjunctions');
    const others = new Set(rows.map((row) => row.object2_designator));
    expect(
      [97031, 97032, 97033, 97034, 97035, 97036].filter((number) => !others.has(String(number))),
    ).toEqual([]);
    expect(rows.every((row) => isBatchDesignator(row.object1_designator))).toBe(true);
    expect(rows.every((row) => Date.parse(row.tca_utc) >= RELEASE_MS)).toBe(true);
    expect(
      rows.every((row) => row.object1_name === row.object1_designator.slice(2).replaceAll('-', ' ')),
    ).toBe(true);
    const [first] = rows;
    const age = (Date.parse(first.tca_utc) - RELEASE_MS) / 86_400_000;
    expect(Number(first.object1_element_age_d)).toBeCloseTo(age, 3);
    expect(Number(first.object1_sigma_t_m)).toBeCloseTo(Math.hypot(3000, 20_000 * age), -3);
  });

  it('ends with status 3 for the nominal liftoff, and tells first whether it is clear', () => {
    expect([plain.status, slipped.status]).toEqual([3, 3]);
    const [first] = plain.stdout.split('\n');
    expect(first).toMatch(
      /^Liftoff 2026-12-05T14:20:00Z: NOT CLEAR: \d+ closer than 5 km; \d+ with a probability of 1E-6 or more\.$/,
    );
    expect(plain.stdout).toContain(LAUNCH_CAUTION);
    expect(plain.stderr).toMatch(
      /WARN: the screening volume reaches 25 km in transverse direction, but three sigma of B-QUILLMERE-C-01 are 180\.2 km at 2026-12-08T15:22:30\.000Z, 155\.2 km more/,
    );
  });

  it('leaves a whole run, the caution in every table', () => {
    const record = wholeRunIn(at('plain'));
    expect(record).toMatchObject({
      command: 'launch',
      window: { startUtc: '2026-12-05T15:22:30.000Z', endUtc: '2026-12-08T15:22:30.000Z', days: 3 },
      counts: { batch: 50, batchPairs: 1225, liftoffs: 1, probablySame: 0 },
      options: { liftoff: '2026-12-05T14:20:00.000Z', 'clear-km': 5 },
    });
    for (const name of ['slips', 'batch-pairs', 'batch-objects']) {
      const rows = table('plain', name);
      expect(rows.length).toBeGreaterThan(0);
      expect(rows.every((row) => row.caution === LAUNCH_CAUTION)).toBe(true);
    }
  });

  it('without a slip is to the byte what it is among slips', () => {
    for (const name of [
      'conjunctions.csv',
      'sensitivity.csv',
      'batch-pairs.csv',
      'batch-objects.csv',
      'companions.csv',
      'unused-elements.csv',
    ]) {
      expect(text('slipped', name), name).toBe(text('plain', name));
    }
    const { best_rank: _, ...alone } = table('plain', 'slips')[0];
    const { best_rank: __, ...among } = table('slipped', 'slips').filter(
      (row) => row.slip_min === '0.000',
    )[0];
    expect(among).toEqual(alone);
  });

  it('tells every candidate in time order, the nominal one among them', () => {
    const rows = table('slipped', 'slips');
    expect(rows.map((row) => [row.liftoff_utc, row.slip_min])).toEqual([
      ['2026-12-05T14:16:00.000Z', '-4.000'],
      ['2026-12-05T14:20:00.000Z', '0.000'],
      ['2026-12-05T14:21:00.000Z', '1.000'],
      ['2026-12-05T14:26:00.000Z', '6.000'],
    ]);
    expect(rows.map((row) => row.best_rank).sort()).toEqual(['1', '2', '3', '4']);
    const best = rows.find((row) => row.best_rank === '1');
    expect(slipped.stdout).toContain(`${best?.liftoff_utc.replace('.000', '')} (slip `);
  });

  it('meets with a slip what it meets with sets that were slipped by hand', async () => {
    const { sets } = await readElementFiles([BATCH], { batch: true });
    const slipMs = 6 * 60_000;
    // The Earth turns once in 2 pi / 7.292115e-5 s.
    const turnedDeg = (360 * slipMs) / ((2000 * Math.PI) / 7.292115e-5);
    const records = sets.map((set) => ({
      ...ommRecord({
        ...set,
        epochMs: set.epochMs + slipMs,
        rightAscensionDeg: (set.rightAscensionDeg + turnedDeg) % 360,
      }),
      NORAD_CAT_ID: 0,
    }));
    writeFileSync(at('by-hand.json'), JSON.stringify(records));
    await launch(
      'by-hand',
      ...['--batch', 'by-hand.json', '--fleet', FLEET, '--catalog', 'catalog.tle', ...limits],
      ...['--liftoff', '2026-12-05T14:26:00Z', '--release', '2026-12-05T15:28:30Z'],
    );
    const [own] = table('by-hand', 'slips');
    const row = table('slipped', 'slips')[3];
    for (const name of [
      'liftoff_utc',
      'clear',
      'why_not',
      'encounters',
      'closest_object1',
      'closest_object2',
    ]) {
      expect(row[name], name).toBe(own[name]);
    }
    expect(Number(row.encounters)).toBeGreaterThan(20);
    expect(Math.abs(Date.parse(row.closest_tca_utc) - Date.parse(own.closest_tca_utc))).toBeLessThanOrEqual(
      1,
    );
    expect(Number(row.closest_miss_distance_m)).toBeCloseTo(Number(own.closest_miss_distance_m), 1);
    expect(Number(row.most_probable_probability) / Number(own.most_probable_probability)).toBeCloseTo(1, 3);
  });

  it('is told pair by pair, closest first, opening from release on', () => {
    const rows = table('plain', 'batch-pairs');
    expect(rows).toHaveLength((50 * 49) / 2);
    // sample-catalogs/README.md: 40 m and 2 cm/s from one to the next.
    const neighbors = rows.find(
      (row) => row.object1_designator === 'B-QUILLMERE-C-24' && row.object2_designator === 'B-QUILLMERE-C-25',
    );
    expect(Number(neighbors?.closest_distance_m)).toBeGreaterThan(25);
    expect(Number(neighbors?.closest_distance_m)).toBeLessThan(60);
    expect(neighbors).toMatchObject({
      closest_utc: '2026-12-05T15:22:30.000Z',
      trend: 'OPENING',
      remarks: 'closest-at-start inside-at-end',
    });
    const distances = rows.map((row) => Number(row.closest_distance_m));
    expect(distances).toEqual(distances.toSorted((a, b) => a - b));
  });
});

describe('a batch that changes its orbit', () => {
  it('is screened on each set while it holds, and its gaps are told', async () => {
    const { status, stderr } = await launch(
      'raised',
      ...['--batch', BATCH, OPERATING, '--batch-validity', VALIDITY, '--catalog', 'catalog.tle', ...TIMES],
      ...['--days', '5', '--miss-km', '15'],
    );
    expect(status).toBe(0);
    expect(stderr).toContain(
      `WARN: ${VALIDITY}:3: no set of B-QUILLMERE-C-01 holds from 2026-12-08T00:00:00.000Z to 2026-12-09T06:00:00.000Z (30.0 h): not screened then; 49 other objects have gaps too (batch-objects.csv)`,
    );
    const phases = table('raised', 'batch-objects');
    expect(phases).toHaveLength(100);
    const rows = table('raised', 'conjunctions');
    const isHeld = (row: Row) =>
      phases.some(
        (phase) =>
          phase.designator === row.object1_designator &&
          row.tca_utc >= phase.screened_from_utc &&
          row.tca_utc < phase.screened_until_utc,
      );
    expect(rows.length).toBeGreaterThan(50);
    expect(rows.every(isHeld)).toBe(true);
    expect(rows.some((row) => row.tca_utc > '2026-12-09T06')).toBe(true);
    // One object in both phases.
    expect(new Set(rows.map((row) => row.object1_designator)).size).toBeLessThanOrEqual(50);
  });
});

describe('a batch that the catalog holds already', () => {
  it('is told once each, whatever numbers it borrows', async () => {
    const { sets } = await readElementFiles([BATCH], { batch: true });
    const few = sets.slice(0, 4);
    // In the catalog under numbers of their own; in the batch with the number of a satellite of the fleet.
    const known = few.map((set, k) => ({
      ...set,
      designator: String(99_901 + k),
      meanAnomalyDeg: set.meanAnomalyDeg + 0.0005,
    }));
    writeFileSync(at('known.tle'), `${known.flatMap((set) => toTwoLine(set)).join('\n')}\n`);
    const own = few.flatMap((set) => [set.name, ...toTwoLine({ ...set, designator: '98001' })]);
    writeFileSync(at('own.tle'), `${own.join('\n')}\n`);
    const { status, stdout } = await launch(
      'known',
      ...[
        '--batch',
        'own.tle',
        '--fleet',
        FLEET,
        '--catalog',
        'known.tle',
        'catalog.tle',
        ...TIMES,
        '--days',
        '1',
      ],
    );
    expect(status).toBe(0);
    expect(table('known', 'batch-objects').map((row) => [row.designator, row.number_in_file])).toEqual(
      [1, 2, 3, 4].map((k) => [`B-QUILLMERE-C-0${k}`, '98001']),
    );
    expect(
      table('known', 'companions')
        .map((row) => [row.object1_designator, row.object2_designator, row.remarks])
        .sort(),
    ).toEqual([1, 2, 3, 4].map((k) => [`B-QUILLMERE-C-0${k}`, `9990${k}`, 'probably-same-object']));
    const met = table('known', 'conjunctions').map((row) => row.object2_designator);
    expect(met.filter((designator) => designator.startsWith('999'))).toEqual([]);
    expect(table('known', 'batch-pairs')).toHaveLength(6 + 12);
    expect(stdout.replaceAll('\n', ' ')).toMatch(
      /99901 is probably the same object as B-QUILLMERE-C-01: within /,
    );
    expect(table('known', 'slips')[0]).toMatchObject({ clear: 'NO', flying_along: '4' });
  });
});

describe('options and files', () => {
  it('may come from a configuration file, with sigmas by designator and messages', async () => {
    writeFileSync(at('one.tle'), setsInText(readFileSync(BATCH, 'utf8'))[38].text);
    writeFileSync(
      at('launch.json'),
      JSON.stringify({
        batch: 'one.tle',
        catalog: ['catalog.tle'],
        liftoff: '2026-12-05T14:20:00Z',
        'release-times': 'release.csv',
        days: 2,
        'batch-sigma-rtn-m': [50, 200, 50],
        'batch-growth-m-per-day': 300,
        sigma: 'sigma.csv',
        'cdm-from-pc': 0,
        top: 1,
      }),
    );
    writeFileSync(at('release.csv'), 'object,release_utc\nQUILLMERE C 39,2026-12-05T15:22:30Z\n');
    const header =
      'object_designator,perigee_min_km,perigee_max_km,eccentricity_max,inclination_min_deg,inclination_max_deg,age_d,sigma_r_m,sigma_t_m,sigma_n_m';
    writeFileSync(
      at('sigma.csv'),
      `${header}\nB-QUILLMERE-C-39,,,,,,0,11,22,33\nB-QUILMERE-C-40,,,,,,0,1,2,3\n`,
    );
    const { status, stderr, stdout } = await launch('configured', '--config', 'launch.json');
    expect(status).toBe(0);
    expect(stderr).toContain(
      'WARN: sigma.csv:3: B-QUILMERE-C-40 is no object of the batch: check it against batch-objects.csv',
    );
    const rows = table('configured', 'conjunctions');
    expect(rows.length).toBeGreaterThan(0);
    expect(rows[0]).toMatchObject({
      object1_designator: 'B-QUILLMERE-C-39',
      object1_sigma_r_m: '11.000',
      object1_sigma_t_m: '22.000',
    });
    const record = wholeRunIn(at('configured'));
    expect(record.counts.messages).toBe(rows.length);
    const message = record.files.find(({ name }: { name: string }) => name.startsWith('cdm/')).name;
    expect(text('configured', message)).toMatch(
      /^OBJECT_DESIGNATOR += B-QUILLMERE-C-39\nCATALOG_NAME += LAUNCH BATCH$/m,
    );
    expect(stdout).toContain('No two objects of the batch come within 25 km of each other.');
  });

  const good = ['--batch', BATCH, '--catalog', FLEET];
  it.each([
    [['--catalog', FLEET, ...TIMES], 'no batch: give --batch FILE'],
    [['--batch', BATCH, ...TIMES], 'nothing to screen against: give --catalog FILE, --fleet FILE, or both'],
    [[...good, '--release', '2026-12-05T15:22:30Z'], 'no liftoff: give --liftoff UTC'],
    [
      [...good, '--liftoff', '2026-12-05T14:20:00Z'],
      'no release: give --release UTC, or --release-times CSV with a time for each object',
    ],
    [
      [...good, '--liftoff', '2026-12-05T15:20:00Z', '--release', '2026-12-05T15:19:00Z'],
      '--release is 2026-12-05T15:19:00.000Z, before --liftoff at 2026-12-05T15:20:00.000Z: check both',
    ],
    [[...good, ...TIMES, '--slip-from', '-5'], '--slip-from is given, but not --slip-to: give both'],
    [
      [...good, ...TIMES, '--slip-every', '5'],
      '--slip-every is 5, but there is no range: give --slip-from MIN and --slip-to MIN',
    ],
    [
      [...good, ...TIMES, '--slip-from', '5', '--slip-to', '-5'],
      '--slip-from is 5, after --slip-to, -5: put the earlier one first',
    ],
    [
      [...good, ...TIMES, '--clear-km', '30'],
      '--clear-km is 30, but passes are listed only within 25 km: give a larger --miss-km',
    ],
    [
      [...good, ...TIMES, '--clear-km', '5', '--volume-rtn-km', '3,20,20'],
      '--clear-km is 5, but passes are listed only within 3 km: give a larger --volume-rtn-km',
    ],
    [
      [...good, ...TIMES, '--batch-sigma-rtn-m', '1,2,0'],
      '--batch-sigma-rtn-m is 1,2,0: it must be three sigmas R,T,N, each above 0 and at most 1000000 m',
    ],
    [
      ['--batch', BATCH, OPERATING, '--catalog', FLEET, ...TIMES],
      `B-QUILLMERE-C-01 has 2 sets (${BATCH}:1, ${OPERATING}:1): say with --batch-validity which holds when, or name the objects apart`,
    ],
    [
      [...good, '--liftoff', '2025-12-05T14:20:00Z', '--release', '2025-12-05T15:22:30Z'],
      `${BATCH}:1: the epoch of B-QUILLMERE-C-01 is 2026-12-05T15:22:30.000Z, 365.0 days from 2025-12-05T15:22:30.000Z, when it begins to hold: give the release that fits the elements (the limit is --max-age-days 30)`,
    ],
  ])('are refused in one line: %j', async (args, message) => {
    const { status, stderr, stdout } = await runInMemory('launch', '--out', at('refused'), ...args);
    expect(stderr.split('\n').filter((line) => line !== '' && !line.includes('INFO'))).toHaveLength(1);
    expect(stderr).toContain(`ERROR: ${message}\n`);
    expect([status, stdout]).toEqual([2, '']);
  });

  it('are explained', async () => {
    const { status, stdout } = await runCommand(['launch', '--help']);
    expect(status).toBe(0);
    expect(stdout.replaceAll(/\s+/g, ' ')).toContain(LAUNCH_CAUTION);
    expect(stdout.split('\n').every((line) => line.length <= 81)).toBe(true);
  });
});
