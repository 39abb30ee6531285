import {
  existsSync,
  mkdirSync,
  mkdtempSync,
  readdirSync,
  readFileSync,
  rmSync,
  utimesSync,
  writeFileSync,
} from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import { InputError } from '../../src/input-error.js';
import type { KnownEncounter } from '../../src/jobs/changes.js';
import { changedSince, openHistory } from '../../src/jobs/compare-with-history.js';
import { keepInHistory, prepareHistory, readPastRuns } from '../../src/jobs/history.js';
import { openOutputFolder } from '../../src/jobs/output-folder.js';
import { nightIn, writeNight } from './nights.js';
import { silentPorts } from './silent-ports.js';

const DAY_MS = 86_400_000;
const FIRST_MS = Date.UTC(2026, 11, 1, 2, 30);

let folder = '';
let history = '';
let published: { folder: string; files: string[] };
beforeEach(async () => {
  folder = mkdtempSync(join(tmpdir(), 'wideberth-history-'));
  history = join(folder, 'runs');
  const output = await openOutputFolder(join(folder, 'tonight'), silentPorts());
  writeNight(output, 'one');
  output.publish();
  output.close();
  published = {
    folder: join(folder, 'tonight'),
    files: ['run.json', 'conjunctions.csv', 'unused-elements.csv', 'cdm/one.kvn'],
  };
});
afterEach(() => rmSync(folder, { recursive: true }));

const encounter = (tcaMs: number): KnownEncounter => ({
  object1Designator: '900001',
  object1Name: 'HERON 1',
  object2Designator: '900777',
  object2Name: 'BRIG "DEB"',
  tcaMs,
  missDistanceM: 400.25,
  collisionProbability: 1.25e-7,
  shorterPeriodS: 5900,
  firstSeenMs: FIRST_MS,
  runsSeen: 2,
});

const keep = (startMs: number, keepRuns?: number, ports = silentPorts(), encounters = [encounter(startMs)]) =>
  keepInHistory(history, startMs, published, encounters, keepRuns, ports);

describe('a kept run', () => {
  test('stands as a whole in a folder named by its window and number', async () => {
    expect(await keep(FIRST_MS)).toBe('2026-12-01T02-30-00Z-0001');
    expect(readdirSync(history)).toEqual(['2026-12-01T02-30-00Z-0001']);
    expect(nightIn(join(history, '2026-12-01T02-30-00Z-0001'), ['encounters.json'])).toBe('one');
  });

  test('never replaces another of the same window', async () => {
    await keep(FIRST_MS);
    expect(await keep(FIRST_MS)).toBe('2026-12-01T02-30-00Z-0002');
    expect(readdirSync(history)).toHaveLength(2);
  });

  test('gives its encounters back as they were', async () => {
    const encounters = [
      encounter(FIRST_MS),
      { ...encounter(FIRST_MS + 0.5), collisionProbability: undefined },
    ];
    await keep(FIRST_MS, undefined, silentPorts(), encounters);
    await keep(FIRST_MS + 1, undefined, silentPorts(), []);
    expect(readPastRuns(history, FIRST_MS + DAY_MS, silentPorts())).toEqual([
      { name: '2026-12-01T02-30-00Z-0002', startMs: FIRST_MS, encounters: [] },
      { name: '2026-12-01T02-30-00Z-0001', startMs: FIRST_MS, encounters },
    ]);
  });

  test('of several at once, all get in', async () => {
    await Promise.all(Array.from({ length: 5 }, () => keep(FIRST_MS)));
    expect(readdirSync(history).map((name) => name.slice(-4))).toEqual([
      '0001',
      '0002',
      '0003',
      '0004',
      '0005',
    ]);
  });
});

describe('past runs', () => {
  test('come in the order of their windows, whatever the file system shows', async () => {
    await keep(FIRST_MS + DAY_MS);
    await keep(FIRST_MS);
    utimesSync(join(history, '2026-12-01T02-30-00Z-0002'), new Date(2040, 1), new Date(2040, 1));
    await keep(FIRST_MS + 5 * DAY_MS);
    const names = readPastRuns(history, FIRST_MS + 2 * DAY_MS, silentPorts()).map(({ name }) => name);
    expect(names).toEqual(['2026-12-02T02-30-00Z-0001', '2026-12-01T02-30-00Z-0002']);
  });

  test('go back as far as a window can reach, and to the latest in any case', async () => {
    await keep(FIRST_MS);
    await keep(FIRST_MS + DAY_MS);
    const namesAt = (startMs: number) =>
      readPastRuns(history, startMs, silentPorts()).map(({ name }) => name.slice(-4));
    expect(namesAt(FIRST_MS + 60 * DAY_MS)).toEqual(['0002', '0001']);
    expect(namesAt(FIRST_MS + 61 * DAY_MS)).toEqual(['0002']);
    expect(namesAt(FIRST_MS + 400 * DAY_MS)).toEqual(['0002']);
  });

  test('are none where there is no history yet', () => {
    expect(readPastRuns(history, FIRST_MS, silentPorts())).toEqual([]);
  });

  test.each([
    ['{', /JSON/],
    ['null', /./],
    ['{"format":2,"encounters":[]}', /not of format 1/],
    ['{"format":1,"encounters":[{"object1Designator":"1"}]}', /encounter 1 in encounters.json is damaged/],
    ['{"format":1,"encounters":[null]}', /encounter 1 in encounters.json is damaged/],
  ])('that are damaged (%s) are told and left out', async (text, message) => {
    await keep(FIRST_MS);
    const damaged = await keep(FIRST_MS);
    writeFileSync(join(history, damaged, 'encounters.json'), text);
    const ports = silentPorts();
    expect(readPastRuns(history, FIRST_MS, ports).map(({ name }) => name.slice(-4))).toEqual(['0001']);
    expect(ports.messages).toEqual([expect.stringMatching(/-0002 is not compared with: /)]);
    expect(ports.messages[0]).toMatch(message);
  });

  test('are not what others put there', async () => {
    await keep(FIRST_MS);
    mkdirSync(join(history, 'archive'));
    writeFileSync(join(history, '2026-12-01T02-30-00Z-0009'), 'a file of that name');
    const ports = silentPorts();
    expect(readPastRuns(history, FIRST_MS, ports)).toHaveLength(1);
    expect(ports.messages).toEqual([
      expect.stringMatching(/0009 and 1 more: not a run of the history, left alone$/),
    ]);
  });
});

describe('retention', () => {
  test('removes nothing when it is not asked for', async () => {
    for (let i = 0; i < 4; i++) await keep(FIRST_MS + i * DAY_MS);
    expect(readdirSync(history)).toHaveLength(4);
  });

  test('removes the oldest by window, and only runs', async () => {
    await keep(FIRST_MS + 3 * DAY_MS);
    await keep(FIRST_MS);
    await keep(FIRST_MS + DAY_MS);
    mkdirSync(join(history, 'archive'));
    const ports = silentPorts();
    await keep(FIRST_MS + 2 * DAY_MS, 2, ports);
    expect(readdirSync(history)).toEqual([
      '2026-12-03T02-30-00Z-0004',
      '2026-12-04T02-30-00Z-0001',
      'archive',
    ]);
    expect(ports.messages.filter((message) => message.startsWith('removed'))).toHaveLength(2);
  });

  test('leaves a run in which someone put a file, and a damaged one', async () => {
    const noted = await keep(FIRST_MS);
    writeFileSync(join(history, noted, 'cdm', 'answer.txt'), 'they will move');
    const damaged = await keep(FIRST_MS);
    writeFileSync(join(history, damaged, 'run.json'), '{');
    const ports = silentPorts();
    const last = await keep(FIRST_MS + DAY_MS, 1, ports);
    expect(readdirSync(history)).toEqual([noted, damaged, last]);
    expect(ports.messages).toEqual([
      expect.stringMatching(
        /0001 is older than the 1 runs to keep, but stays: cdm\/answer\.txt in it is not of the run/,
      ),
      expect.stringMatching(/0002 is older than the 1 runs to keep, but stays: its run\.json cannot be read/),
    ]);
  });
});

describe('after a killed run', () => {
  test('unfinished folders are removed', async () => {
    mkdirSync(join(history, '.history.partial', 'cdm'), { recursive: true });
    mkdirSync(join(history, '.history.removing'));
    const ports = silentPorts();
    await prepareHistory(history, ports);
    expect(readdirSync(history)).toEqual([]);
    expect(ports.messages).toHaveLength(2);
  });

  test('a stop signal in the middle leaves nothing', async () => {
    await keep(FIRST_MS);
    const ports = silentPorts();
    const missing = { ...published, files: [...published.files, 'none.csv'] };
    await expect(keepInHistory(history, FIRST_MS, missing, [], undefined, ports)).rejects.toThrow(InputError);
    expect(ports.undos.size).toBe(0);
    expect(readdirSync(history)).toEqual(['2026-12-01T02-30-00Z-0001']);
  });
});

test('a history that cannot be written is refused before any work', async () => {
  writeFileSync(join(folder, 'file'), '');
  const prepared = prepareHistory(join(folder, 'file', 'runs'), silentPorts());
  await expect(prepared).rejects.toThrow(InputError);
  await prepareHistory(history, silentPorts());
  expect(existsSync(history)).toBe(true);
  expect(readFileSync(join(folder, 'file'), 'utf8')).toBe('');
});

describe('the settings of the run before', () => {
  const tonight = { version: '0.0.0', options: {}, inputs: { elements: [], others: [] } };
  const since = async (ports: ReturnType<typeof silentPorts>) =>
    changedSince(await openHistory(history, FIRST_MS + DAY_MS, ports), tonight, ports);
  const writeRecord = (text: string) =>
    writeFileSync(join(history, '2026-12-01T02-30-00Z-0001', 'run.json'), text);

  test('are those of its record', async () => {
    await keep(FIRST_MS);
    writeRecord(JSON.stringify({ ...tonight, options: { days: 7 } }));
    const ports = silentPorts();
    expect(await since(ports)).toEqual([{ setting: 'days', previous: 7, current: null }]);
    expect(ports.messages).toEqual([
      'run 2026-12-01T02-30-00Z-0001, which this one is compared with, had other settings: --days: 7 then, none now; what changes.csv tells may come from these alone',
    ]);
    writeRecord(JSON.stringify(tonight));
    const quiet = silentPorts();
    expect(await since(quiet)).toEqual([]);
    expect(quiet.messages).toEqual([]);
  });

  test.each(['', '{', '[]', '{"program":"wideberth","files":[]}'])(
    'are not known where its record is %j, and the doubt is told',
    async (text) => {
      await keep(FIRST_MS);
      writeRecord(text);
      const ports = silentPorts();
      expect(await since(ports)).toBeUndefined();
      expect(ports.messages).toEqual([
        'the settings of run 2026-12-01T02-30-00Z-0001 of the history cannot be read from its run.json: what changes.csv tells may come from other settings alone',
      ]);
    },
  );

  test('are of no concern where there is none', async () => {
    const ports = silentPorts();
    expect(await since(ports)).toBeUndefined();
    expect(ports.messages).toEqual([]);
  });
});
