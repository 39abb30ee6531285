import * as files from 'node:fs';
import { mkdtempSync, readdirSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, expect, test, vi } from 'vitest';
import type { KnownEncounter } from '../../src/jobs/changes.js';
import { keepInHistory, readPastRuns } from '../../src/jobs/history.js';
import { openOutputFolder } from '../../src/jobs/output-folder.js';
import { nightIn, writeNight } from './nights.js';
import { silentPorts } from './silent-ports.js';

/*
 * A history on a file system that dies: the chosen call and every one after it throw, as if the process had
 * been killed there. Random kills of the real command hardly ever hit the moments between two calls.
 */

const death = vi.hoisted(() => ({ callsLeft: Number.POSITIVE_INFINITY, openFiles: new Set<number>() }));

class Killed extends Error {}

vi.mock('node:fs', async (importOriginal) => {
  const original = await importOriginal<typeof import('node:fs')>();
  const count =
    (name: string, call: (...args: unknown[]) => unknown) =>
    (...args: unknown[]) => {
      if (death.callsLeft-- <= 0) throw new Killed(name);
      const result = call(...args);
      if (name === 'openSync') death.openFiles.add(result as number);
      if (name === 'closeSync') death.openFiles.delete(args[0] as number);
      return result;
    };
  return Object.fromEntries(
    Object.entries(original).map(([name, value]) => [
      name,
      name.endsWith('Sync') && typeof value === 'function'
        ? count(name, name === 'fsyncSync' ? () => {} : (value as never))
        : value,
    ]),
  );
});

const folder = mkdtempSync(join(tmpdir(), 'wideberth-dying-history-'));
const history = join(folder, 'runs');
const outOf = (night: number) => join(folder, `out-${night}`);
afterEach(() => {
  death.callsLeft = Number.POSITIVE_INFINITY;
  rmSync(folder, { recursive: true });
});

const startMs = (night: number) => Date.UTC(2026, 11, night);

const encounter = (night: number): KnownEncounter => ({
  object1Designator: '98001',
  object1Name: '',
  object2Designator: '97001',
  object2Name: '',
  tcaMs: startMs(night) + 1000,
  missDistanceM: night,
  collisionProbability: undefined,
  shorterPeriodS: 5700,
  firstSeenMs: startMs(night),
  runsSeen: 1,
});

async function publish(night: number): Promise<void> {
  const output = await openOutputFolder(outOf(night), silentPorts());
  writeNight(output, `night-${night}`);
  output.publish();
  output.close();
}

/** Keeps the published night, and no other. */
async function keep(night: number): Promise<void> {
  const names = ['run.json', 'conjunctions.csv', 'unused-elements.csv', `cdm/night-${night}.kvn`];
  await keepInHistory(
    history,
    startMs(night),
    { folder: outOf(night), files: names },
    [encounter(night)],
    1,
    silentPorts(),
  );
}

/** The nights in the history, each looked at to its last byte. */
function nights(): number[] {
  const names = readdirSync(history).filter((name) => !name.startsWith('.'));
  for (const name of names) {
    expect(nightIn(join(history, name), ['encounters.json'])).toBe(`night-${Number(name.slice(8, 10))}`);
  }
  const past = readPastRuns(history, startMs(30), silentPorts());
  expect(past.map(({ encounters }) => encounters.length)).toEqual(names.map(() => 1));
  return names.map((name) => Number(name.slice(8, 10)));
}

test('a run that dies at any call while it is kept leaves whole runs, and the next one is kept', async () => {
  const found = new Set<string>();
  let died = true;
  let call = 0;
  for (const night of [1, 2, 3]) await publish(night);
  await keep(1);
  const before = join(folder, 'before');
  files.cpSync(history, before, { recursive: true });
  for (; died; call++) {
    rmSync(history, { recursive: true });
    files.cpSync(before, history, { recursive: true });
    death.openFiles.clear();
    death.callsLeft = call;
    died = false;
    try {
      await keep(2);
    } catch (error) {
      if (!(error instanceof Killed)) throw error;
      died = true;
    }
    death.callsLeft = Number.POSITIVE_INFINITY;
    // The kernel closes the files of a dead process, and so ends its lock.
    for (const fd of death.openFiles) files.closeSync(fd);
    found.add(nights().join(' '));

    await keep(3);
    expect(nights()).toEqual([3]);
  }
  expect(call).toBeGreaterThan(30);
  // Before, with the new one beside both, and with the oldest gone.
  expect([...found].sort()).toEqual(['1', '1 2', '2']);
});
