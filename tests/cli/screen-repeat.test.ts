import { cpSync, mkdirSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, expect, test } from 'vitest';
import {
  contentsOf,
  freshFolder,
  ONE_WORKER,
  type Outcome,
  rowsOf,
  runCommand,
  runRecordOf,
  SAMPLES,
  smallerCatalog,
  withClock,
} from './real-command.js';

/*
 * The same input gives the same bytes: whatever the number of threads, the clock, and the order in which
 * files are named as long as it says nothing.
 */

const folder = freshFolder();
afterAll(folder.remove);
const at = (name: string) => join(folder.path, name);

const CATALOG = at('catalog.tle');
const BEFORE = at('before');

beforeAll(async () => {
  writeFileSync(CATALOG, smallerCatalog(join(SAMPLES, 'catalog.tle')));
  writeFileSync(at('evening.tle'), smallerCatalog(join(SAMPLES, 'night-1/catalog.tle')));
  const { status, stderr } = await runCommand([
    ...['screen', '--fleet', join(SAMPLES, 'night-1/fleet.tle')],
    ...['--catalog', at('evening.tle')],
    ...['--start', '2026-11-30T20:00:00Z', '--days', '0.3', '--miss-km', '40'],
    ...['--out', at('evening'), '--history', BEFORE, ...ONE_WORKER],
  ]);
  expect(status, stderr).toBe(0);

  first = await night('threads-1', ONE_WORKER);
  const messages = Object.keys(first.contents).filter((name) => name.startsWith('cdm/'));
  expect(messages.length).toBeGreaterThan(3);
  expect(Object.keys(first.contents)).toEqual([
    ...messages,
    'changes.csv',
    'companions.csv',
    'conjunctions.csv',
    'run.json',
    'sensitivity.csv',
    'unused-elements.csv',
  ]);
  expect(rowsOf(first.path('conjunctions.csv')).length).toBeGreaterThan(30);
  expect(new Set(rowsOf(first.path('changes.csv')).map((row) => row.change)).size).toBeGreaterThan(2);
  expect(runRecordOf(first.path('')).environment.workers).toBe(1);
});

type Night = {
  readonly path: (name: string) => string;
  readonly contents: Record<string, string>;
  readonly outcome: Outcome;
};

/** The run after the one of the evening, in a folder of its own, in which the names are always the same. */
async function night(
  name: string,
  more: readonly string[],
  files = ['--fleet', join(SAMPLES, 'fleet.tle'), '--catalog', CATALOG],
  environment = withClock(at(`${name}.mjs`), `return ${Date.UTC(2026, 11, 1, 3)};`),
): Promise<Night> {
  const path = (file: string) => join(at(name), 'tonight', file);
  cpSync(BEFORE, join(at(name), 'runs'), { recursive: true });
  const outcome = await runCommand(
    [
      ...['screen', ...files, '--objects', join(SAMPLES, 'objects.csv')],
      ...['--start', '2026-12-01T00:00:00Z', '--days', '0.35', '--miss-km', '40'],
      ...['--out', 'tonight', '--history', 'runs', '--cdm-from-pc', '1e-20', ...more],
    ],
    { environment, cwd: at(name) },
  );
  expect(outcome.status, outcome.stderr).toBe(0);
  return { path, contents: contentsOf(path('')), outcome };
}

let first: Night;

test.concurrent.each(['2', '3'])(
  '%s threads give the same files and terminal text as one',
  async (workers) => {
    const { path, contents, outcome } = await night(`threads-${workers}`, ['--workers', workers]);
    expect(runRecordOf(path('')).environment.workers).toBe(Number(workers));
    expect(contents).toEqual(first.contents);
    expect(outcome.stdout).toBe(first.outcome.stdout);
  },
);

test.concurrent('a clock that jumps by days changes only what messages must tell of it', async () => {
  const jumping = 'return RealDate.now() + 86_400_000 * 20 * (asked % 2 === 0 ? 1 : -1);';
  const { path, contents, outcome } = await night(
    'jumping',
    [],
    undefined,
    withClock(at('jumping-clock.mjs'), jumping),
  );
  const { startedUtc, finishedUtc } = runRecordOf(path('')).environment;
  for (const told of [startedUtc, finishedUtc]) {
    expect(Math.abs(Date.parse(told) - Date.now())).toBeGreaterThan(86_400_000);
  }
  expect(outcome.stdout).toBe(first.outcome.stdout);

  expect(Object.keys(contents)).toEqual(Object.keys(first.contents));
  const changed = Object.keys(contents).filter((name) => contents[name] !== first.contents[name]);
  const messages = Object.keys(contents).filter((name) => name.startsWith('cdm/'));
  expect(changed).toEqual([...messages, 'run.json']);
  for (const name of messages) {
    const before = first.contents[name].split('\n');
    const differing = contents[name].split('\n').filter((line, i) => line !== before[i]);
    // When it was made (CCSDS 508.0-B-1, 5.1), and an identifier that sets it off from an earlier one.
    expect(differing.map((line) => line.split(/ +=/)[0])).toEqual(['CREATION_DATE', 'MESSAGE_ID']);
  }
  // The record lists the messages with their hashes; nothing else in it differs.
  const withoutHashes = (text: string) => text.replaceAll(/"sha256": "[0-9a-f]+"/g, '');
  expect(withoutHashes(contents['run.json'])).toBe(withoutHashes(first.contents['run.json']));
});

/**
 * The catalog in three files, cut between sets; an older and a newer set of one object come into different
 * files.
 */
function parts(): string[] {
  const lines = readFileSync(CATALOG, 'utf8').split('\n');
  const cuts = [
    0,
    lines.indexOf('TARNWICK 1 DEB'),
    lines.findIndex((line) => line.startsWith('1 W0181U')) + 2,
  ];
  return cuts.map((from, i) => {
    expect(from).toBeGreaterThanOrEqual(0);
    const path = at(`part-${i}.tle`);
    writeFileSync(
      path,
      `${lines
        .slice(from, cuts[i + 1])
        .join('\n')
        .trimEnd()}\n`,
    );
    return path;
  });
}

test.concurrent('the order in which files are named changes the lists of inputs, but no figure', async () => {
  const [a, b, c] = parts();
  mkdirSync(at('fleet'));
  const own = readFileSync(join(SAMPLES, 'fleet.tle'), 'utf8').split(/(?<=\n)(?=[A-Z])/);
  expect(own.length).toBe(36);
  writeFileSync(at('fleet/a.tle'), own.slice(0, 20).join(''));
  writeFileSync(at('fleet/b.tle'), own.slice(20).reverse().join(''));
  const together = await night('together', ONE_WORKER, [
    ...['--fleet', at('fleet/a.tle'), at('fleet/b.tle')],
    ...['--catalog', a, b, '--catalog', c],
  ]);
  const shuffled = await night('shuffled', ONE_WORKER, [
    ...['--catalog', c, '--fleet', at('fleet/b.tle'), '--catalog', a],
    ...['--fleet', at('fleet/a.tle'), '--catalog', b],
  ]);
  for (const name of ['conjunctions.csv', 'sensitivity.csv', 'companions.csv', 'changes.csv']) {
    expect(together.contents[name], name).toBe(first.contents[name]);
    expect(shuffled.contents[name], name).toBe(first.contents[name]);
  }
  const unused = ({ path }: Night) =>
    rowsOf(path('unused-elements.csv'))
      .map((row) => JSON.stringify(row))
      .sort();
  expect(unused(shuffled)).toEqual(unused(together));
  expect(runRecordOf(shuffled.path('')).inputs.elements.map(({ file }: { file: string }) => file)).toEqual([
    at('fleet/b.tle'),
    at('fleet/a.tle'),
    c,
    a,
    b,
  ]);
});
