import { readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { gzipSync } from 'node:zlib';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import type { ElementSet } from '../../src/elements/element-set.js';
import { csvFile, jsonFile, kvnFile, ommRecord, threeLineFile, xmlFile } from '../elements/formats.js';
import { syntheticCatalog } from '../synthetic/catalog.js';
import { roundToTwoLine } from '../synthetic/two-line.js';
import { freshFolder, ONE_WORKER, rowsOf, runCommand, runRecordOf } from './real-command.js';

/*
 * The forms in which element sets and what is known of objects can be given, through the real command.
 */

const START_MS = Date.UTC(2026, 11, 1);
/** In one day-of-year unit of two lines and in whole microseconds of an OMM alike. */
const EXACT_MS = 86_400;

const folder = freshFolder();
afterAll(folder.remove);
const at = (name: string) => join(folder.path, name);
function write(name: string, content: string | Uint8Array): string {
  writeFileSync(at(name), content);
  return at(name);
}

const sets: ElementSet[] = syntheticCatalog({ seed: 31, count: 130, epochMs: START_MS, oldestDays: 2 }).map(
  (set, i) =>
    roundToTwoLine({
      ...set,
      name: `BRAYMOOR ${i + 1}`,
      epochMs: Math.round(set.epochMs / EXACT_MS) * EXACT_MS,
    }),
);
const fleet = sets.slice(0, 10);
const catalog = sets.slice(10);

const WINDOW = ['--start', '2026-12-01T00:00:00Z', '--days', '0.25', '--miss-km', '120', ...ONE_WORKER];

async function screened(out: string, args: readonly string[], input?: string | Uint8Array): Promise<string> {
  const { status, stderr } = await runCommand(['screen', ...args, ...WINDOW, '--out', at(out)], {
    ...(input === undefined ? {} : { input }),
  });
  expect(status, stderr).toBe(0);
  return readFileSync(at(`${out}/conjunctions.csv`), 'utf8');
}

const counts = (out: string) => runRecordOf(at(out)).inputs.elements;

let expected = '';
beforeAll(async () => {
  expected = await screened('plain', [
    ...['--fleet', write('fleet.tle', threeLineFile(fleet))],
    ...['--catalog', write('catalog.tle', threeLineFile(catalog))],
  ]);
  expect(rowsOf(at('plain/conjunctions.csv')).length).toBeGreaterThan(20);
  // All numbers are above 99 999: two lines hold them as Alpha-5, an OMM as integers.
  expect(readFileSync(at('catalog.tle'), 'utf8')).toMatch(/^1 W0\d{3}U/m);
});

describe.concurrent('the same sets in another form give the same bytes', () => {
  test('gzip, and standard input', async () => {
    expect(
      await screened(
        'stdin',
        ['--fleet', '-', '--catalog', write('catalog.tle.gz', gzipSync(threeLineFile(catalog)))],
        threeLineFile(fleet),
      ),
    ).toBe(expected);
    expect(counts('stdin')).toMatchObject([
      { file: '-', read: 10, used: 10 },
      { file: at('catalog.tle.gz'), read: 120, used: 120 },
    ]);
  });

  test('OMM in JSON, CSV, XML and KVN, in several files, the option repeated or one after the other', async () => {
    expect(
      await screened('several', [
        ...['--fleet', write('fleet-1.kvn', kvnFile(fleet.slice(6)))],
        ...['--fleet', write('fleet-2.json', jsonFile(fleet.slice(0, 6), 2))],
        ...['--catalog', write('a.xml', xmlFile(catalog.slice(0, 30)))],
        write('b.json.gz', gzipSync(jsonFile(catalog.slice(80)))),
        write('c.csv', csvFile(catalog.slice(30, 50))),
        ...['--catalog', write('d.tle', threeLineFile(catalog.slice(50, 65)))],
        write('e.kvn', kvnFile(catalog.slice(65, 80))),
      ]),
    ).toBe(expected);
    expect(counts('several').map(({ used }: { used: number }) => used)).toEqual([4, 6, 30, 40, 20, 15, 15]);
  });

  test('an Alpha-5 number and the integer are one object, for sets and for the file of objects', async () => {
    // The catalog has the fleet once more, as integers; the file of objects has Alpha-5, and is in Latin-1.
    const told = 'designator,hard_body_radius_m,name\nW0003,7.5,ÉTOILE Nº 3\n300012,0.25,\n';
    const objects = write('objects.csv', Buffer.from(told, 'latin1'));
    const twice = await screened('twice', [
      ...['--fleet', at('fleet.tle'), '--objects', objects],
      ...['--catalog', write('all.json', jsonFile([...catalog, ...fleet]))],
    ]);
    expect(counts('twice')).toMatchObject([
      { read: 10, used: 10 },
      { read: 130, used: 120, superseded: 10 },
    ]);
    const withoutRadius = (text: string) =>
      text
        .split('\r\n')
        .map((line) => line.replace('ÉTOILE Nº 3', 'BRAYMOOR 4').split(',').slice(1, 14).join(','));
    expect(withoutRadius(twice).sort()).toEqual(withoutRadius(expected).sort());
    const rows = rowsOf(at('twice/conjunctions.csv'));
    const radii = new Map([
      ['300003', 7.5],
      ['300012', 0.25],
    ]);
    for (const row of rows) {
      const sum = (radii.get(row.object1_designator) ?? 5) + (radii.get(row.object2_designator) ?? 5);
      expect(row.hard_body_radius_m).toBe(sum.toFixed(3));
    }
    const renamed = rows.filter((row) => row.object1_designator === '300003').map((row) => row.object1_name);
    expect(new Set(renamed)).toEqual(new Set(['ÉTOILE Nº 3']));
  });
});

/** What a spreadsheet or a loader may stumble over. */
const AWKWARD = [
  'COMMA, THE SECOND',
  'SAYS "HELLO"',
  '""',
  ',',
  "'",
  "'=LATE",
  '=1+1',
  '+44',
  '-7 DEGREES',
  '@HOME',
  'TWO, "QUOTES", AND A COMMA',
  'ДЖЕРЕЛО-2',
  '風見鶏 3',
  'عصفور',
  'NAÏVE ÉTOILE',
  '𝔘𝔫𝔦',
  '1E5',
  '000123',
  'TRUE',
];

/** As documented at the column: one apostrophe stands before text that a spreadsheet would run. */
const readBack = (cell: string) => (/^'+[=+\-@]/.test(cell) ? cell.slice(1) : cell);

const csvCell = (text: string) => `"${text.replaceAll('"', '""')}"`;

test.concurrent('names with commas, quotes, line breaks, other scripts and formula starts come back unchanged', async () => {
  const named = sets.map((set, i) => ({ ...set, name: AWKWARD[i % AWKWARD.length] }));
  // Line breaks can only come with the file of objects: in element sets they become blanks.
  const broken = new Map(
    catalog.slice(0, 40).map(({ designator }, i) => [designator, `TWO\nLINES ${i}\r\nOR THREE`]),
  );
  const objects = [...broken].map(([designator, name]) => `${designator},${csvCell(name)}\n`);
  await screened('names', [
    ...['--all-on-all', '--catalog', write('named.json', JSON.stringify(named.map(ommRecord)))],
    ...['--objects', write('names.csv', `designator,name\n${objects.join('')}`)],
    ...['--cdm-from-pc', '0', '--history', at('names-runs')],
  ]);
  const given = new Map([...named.map(({ designator, name }) => [designator, name] as const), ...broken]);
  for (const file of ['conjunctions.csv', 'changes.csv']) {
    const rows = rowsOf(at(`names/${file}`));
    const seen = new Set<string>();
    for (const row of rows) {
      for (const side of ['object1', 'object2']) {
        const name = given.get(row[`${side}_designator`]) as string;
        expect(readBack(row[`${side}_name`])).toBe(name);
        expect(row[`${side}_name`]).not.toMatch(/^[=+\-@]/);
        seen.add(name);
      }
    }
    expect(AWKWARD.filter((name) => !seen.has(name))).toEqual([]);
    expect([...seen].filter((name) => name.includes('\n')).length).toBeGreaterThan(10);
  }
  // A second night reads the names back from the history, and the bytes are the same.
  const second = await screened('names', [
    ...['--all-on-all', '--catalog', at('named.json')],
    ...['--objects', at('names.csv'), '--history', at('names-runs')],
  ]);
  expect(second).toBe(readFileSync(at('names/conjunctions.csv'), 'utf8'));
  expect(new Set(rowsOf(at('names/changes.csv')).map((row) => row.change))).toEqual(new Set(['steady']));
});

test.concurrent('damaged files end with 0 or 2, and no record of them is lost', async () => {
  let seed = 20_261_201;
  const random = (below: number) => {
    seed = (Math.imul(seed, 1_664_525) + 1_013_904_223) >>> 0;
    return Math.floor((seed / 2 ** 32) * below);
  };
  const forms = {
    'damaged.tle': threeLineFile(catalog.slice(0, 40)),
    'damaged.json': jsonFile(catalog.slice(40, 70), 1),
    'damaged.csv': csvFile(catalog.slice(70, 95)),
    'damaged.xml': xmlFile(catalog.slice(95, 110)),
    'damaged.kvn': kvnFile(catalog.slice(110)),
  };
  let ended = 0;
  for (let round = 0; round < 3; round += 1) {
    const paths = Object.entries(forms).map(([name, text]) => {
      const bytes = Buffer.from(text);
      for (let k = 0; k < 6; k += 1) bytes[random(bytes.length)] = 32 + random(95);
      return write(name, name.endsWith('tle') ? bytes.subarray(0, bytes.length - random(200)) : bytes);
    });
    const out = `damaged-${round}`;
    const outcome = await runCommand([
      ...['screen', '--fleet', at('fleet.tle'), '--catalog', ...paths],
      ...[...WINDOW, '--out', at(out)],
    ]);
    if (outcome.status !== 0) {
      expect(outcome).toMatchObject({ status: 2, stdout: '' });
      expect(outcome.stderr).toMatch(/^\[\S+Z\] ERROR: .*damaged\.\w+.*\n$/);
      continue;
    }
    ended += 1;
    const [, ...files] = counts(out);
    expect(files.map(({ file }: { file: string }) => file)).toEqual(paths);
    const unused = rowsOf(at(`${out}/unused-elements.csv`));
    for (const { file, read, used, superseded, rejected } of files) {
      expect(read).toBe(used + superseded + rejected);
      const here = unused.filter((row) => row.file === file);
      expect(here.filter((row) => row.reason === 'rejected').length).toBe(rejected);
      expect(here.filter((row) => row.reason === 'superseded').length).toBe(superseded);
    }
    expect(files.filter(({ rejected }: { rejected: number }) => rejected > 0).length).toBeGreaterThan(1);
  }
  expect(ended).toBeGreaterThan(1);
});
