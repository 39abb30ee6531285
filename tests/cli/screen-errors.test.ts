import { existsSync, mkdirSync, readdirSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { gzipSync } from 'node:zlib';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { CAUTION } from '../../src/caution.js';
import { freshFolder, type Outcome, runCommand, SAMPLES, withClock } from './real-command.js';
import { runInMemory } from './run-in-memory.js';

/*
 * Mistakes of the user through the real command: status 2, one line that says what is wrong and what to do,
 * and nothing left behind. And the help.
 */

const folder = freshFolder();
afterAll(folder.remove);
const at = (name: string) => join(folder.path, name);

const FLEET = join(SAMPLES, 'fleet.tle');
const NIGHT = ['--start', '2026-12-01T00:00:00Z', '--days', '0.1'];

beforeAll(() => {
  const tle = readFileSync(FLEET, 'utf8');
  writeFileSync(at('binary.tle'), Buffer.from([0x7f, 0x45, 0x4c, 0x46, 0, 0, 1, 2, 3]));
  writeFileSync(at('page.tle'), '<!DOCTYPE html>\n<html><body>Please log in</body></html>\n');
  writeFileSync(at('damaged.tle'), tle.replaceAll(/^1 (.*).$/gm, '1 $1X'));
  writeFileSync(at('empty.tle'), '');
  writeFileSync(at('cut.tle.gz'), gzipSync(tle).subarray(0, 300));
  writeFileSync(at('objects.csv'), 'designator,hard_body_radius_m\n98001,2.5\n98002,two\n');
  mkdirSync(at('archive'));
  mkdirSync(at('other'));
  writeFileSync(at('other/letter.txt'), 'not of a run');
});

type Mistake = readonly [what: string, args: readonly string[], message: string | RegExp];

const own = ['--fleet', FLEET];
const withCatalog = (catalog: string) => [...own, '--catalog', catalog, ...NIGHT];

/** In what the files hold, found by the job: it has begun to write then. */
const MISTAKES_IN_FILES: readonly Mistake[] = [
  ['a file that is not there', withCatalog('gone.tle'), 'gone.tle does not exist: check the path'],
  ['a folder', withCatalog('archive'), 'archive is a directory: name the element-set files in it'],
  ['binary data', withCatalog('binary.tle'), /^binary.tle holds binary data/],
  ['a web page', withCatalog('page.tle'), /^page.tle is a web page, not element sets/],
  [
    'nothing usable',
    withCatalog('damaged.tle'),
    /^damaged.tle holds no usable element set \(all 36 records rejected, the first at line \d+: line 1, column 69: checksum "X", expected \d\)/,
  ],
  ['a gzip that breaks off', withCatalog('cut.tle.gz'), /^cut.tle.gz .*(damaged|end of file)/],
  [
    'a file named twice',
    [...own, '--catalog', FLEET, FLEET, ...NIGHT],
    /fleet.tle is named twice: name each file once$/,
  ],
  [
    'a value that is none in the file of objects',
    [...withCatalog(FLEET), '--objects', 'objects.csv'],
    /^objects.csv:3: hard_body_radius_m is "two", expected a number of meters greater than 0$/,
  ],
];

/** In the options, found before anything is opened. */
const MISTAKES_IN_OPTIONS: readonly Mistake[] = [
  ['a word of no option', [...withCatalog(FLEET), 'more.tle'], /^more.tle belongs to no option: /],
  [
    'a number out of range',
    [...own, '--catalog', FLEET, '--days', '-3'],
    '--days is -3: it must be a number, above 0, at most 60',
  ],
  [
    'a time that is none',
    [...own, '--catalog', FLEET, '--start', 'tomorrow'],
    '--start is tomorrow: it must be a UTC time such as 2026-12-01T00:00:00Z',
  ],
  [
    'an unknown option',
    [...withCatalog(FLEET), '--miskm', '3'],
    'unknown option --miskm: did you mean --miss-km?',
  ],
  [
    'two ways to say what is close',
    [...withCatalog(FLEET), '--miss-km', '3', '--volume-rtn-km', '1,2,3'],
    '--miss-km and --volume-rtn-km exclude each other: give one of them',
  ],
  [
    'a history in the output folder',
    [...withCatalog(FLEET), '--history', 'new/a history in the output folder/runs'],
    /^--history is new\/\S.*runs, inside --out new\/\S.*, which is replaced as a whole: name a folder beside it$/,
  ],
  ['no fleet', ['--catalog', FLEET, ...NIGHT], /^no fleet: give --fleet FILE, or --all-on-all/],
];

/** Two at a time: as many as there are cores to run them. */
async function eachOf<T>(items: readonly T[], work: (item: T) => Promise<void>): Promise<void> {
  const left = [...items];
  const next = async (): Promise<void> => {
    for (let item = left.shift(); item !== undefined; item = left.shift()) await work(item);
  };
  await Promise.all([next(), next()]);
}

function expectOneLine(outcome: Outcome, [what, , message]: Mistake): void {
  expect(outcome, what).toMatchObject({ status: 2, stdout: '' });
  const line = /^\[\d{4}-\d\d-\d\dT\d\d:\d\d:\d\dZ\] ERROR: (.*)\n$/.exec(outcome.stderr);
  expect(line?.[1], `${what}: ${outcome.stderr}`).toMatch(message);
}

test.concurrent('each mistake in files is told in one line with what to do, ends with 2 and leaves nothing behind', async () => {
  const before = readdirSync(folder.path);
  await eachOf(MISTAKES_IN_FILES, async (mistake) => {
    const [what, args] = mistake;
    const outcome = await runCommand(['screen', ...args, '--out', `new/${what}`], { cwd: folder.path });
    expectOneLine(outcome, mistake);
  });
  // The folder above the output may have come into being, but nothing stands in it.
  expect(readdirSync(folder.path).filter((name) => name !== 'new')).toEqual(before);
  expect(readdirSync(folder.path).includes('new') ? readdirSync(at('new')) : []).toEqual([]);
});

test.each(MISTAKES_IN_OPTIONS)('so is %s', async (...mistake) => {
  const [what, args] = mistake;
  expectOneLine(await runInMemory('screen', ...args, '--out', `new/${what}`), mistake);
  expect(existsSync('new')).toBe(false);
});

test.concurrent('without a start, elements of months ago are refused with the start that would fit', async () => {
  const environment = withClock(at('archive/spring.mjs'), `return ${Date.UTC(2027, 2, 1)};`);
  const outcome = await runCommand(
    ['screen', ...own, '--catalog', join(SAMPLES, 'catalog.tle'), '--out', at('late')],
    { environment },
  );
  expect(outcome).toMatchObject({ status: 2, stdout: '' });
  expect(outcome.stderr).toMatch(
    /^\[2027-03-01T00:00:00Z\] ERROR: 36 of 36 fleet element sets have their epoch more than 30 days from the start 2027-03-01T00:00:00.000Z \(median epoch 2026-11-30T\S+\): give --start near that epoch, or newer element sets\n$/,
  );
  expect(readdirSync(folder.path)).not.toContain('late');
});

test.concurrent('a folder that holds something else is not touched', async () => {
  const outcome = await runCommand(['screen', ...withCatalog(FLEET), '--out', 'other'], {
    cwd: folder.path,
  });
  expect(outcome).toMatchObject({ status: 2, stdout: '' });
  expect(outcome.stderr).toContain('--out is other, which holds files but no run.json of wideberth');
  expect(readdirSync(at('other'))).toEqual(['letter.txt']);
});

test.concurrent('with --log json the mistake is one JSON object', async () => {
  const outcome = await runCommand(['screen', ...withCatalog('gone.tle'), '--log', 'json', '--out', 'x'], {
    cwd: folder.path,
  });
  expect(outcome).toMatchObject({ status: 2, stdout: '' });
  expect(JSON.parse(outcome.stderr)).toMatchObject({
    level: 'error',
    message: 'gone.tle does not exist: check the path',
  });
});

describe.concurrent('help', () => {
  test.each([[['--help']], [['screen', '--help']]])(
    '%s fits a terminal and carries the caution',
    async (args) => {
      const { status, stdout, stderr } = await runCommand(args);
      expect({ status, stderr }).toEqual({ status: 0, stderr: '' });
      const lines = stdout.trimEnd().split('\n');
      expect(lines.length).toBeLessThanOrEqual(45);
      for (const line of lines) expect(line.length, line).toBeLessThanOrEqual(80);
      expect(stdout.replaceAll('\n', ' ')).toContain(CAUTION);
    },
  );
});
