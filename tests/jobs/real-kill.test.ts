import { spawn } from 'node:child_process';
import { existsSync, readdirSync, readFileSync, statSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, expect, test } from 'vitest';
import type { ScreenOptions } from '../../src/jobs/screen-options.js';
import { freshFolder, outcomeOf, runCommand, SAMPLES, setsInText, wholeRunIn } from '../cli/real-command.js';

/*
 * Screenings of the compiled build, killed: whatever the moment, the output folder holds the run before or the
 * new one, whole; the history holds whole runs; and the next run goes on from there. Those that are killed leave
 * out the command line, which is read before anything of a run exists; the first and the last have it.
 */

const SCRIPT = join(import.meta.dirname, 'fixtures/screen-process.mjs');
const KILLS = 50;
/** Runs at once, each with a folder of its own. */
const LANES = 2;

const folder = freshFolder();
afterAll(folder.remove);
const at = (name: string) => join(folder.path, name);

beforeAll(() => {
  const few = (name: string, numbers: RegExp) =>
    setsInText(readFileSync(join(SAMPLES, name), 'utf8'))
      .filter(({ number }) => numbers.test(number))
      .map(({ text }) => text)
      .join('');
  writeFileSync(at('fleet.tle'), few('fleet.tle', /^980[12]/));
  writeFileSync(at('catalog.tle'), few('catalog.tle', /^(W90|97)/));
});

/** Each run has its own start, by which its results are told from those of the others. */
const startOf = (round: number) => `2026-12-01T03:15:${String(round).padStart(2, '0')}.000Z`;

const command = (lane: number, round: number) => [
  ...['screen', '--fleet', at('fleet.tle'), '--catalog', at('catalog.tle'), '--start', startOf(round)],
  ...['--days', '0.01', '--miss-km', '1000', '--workers', '1', '--cdm-from-pc', '0', '--keep-runs', '2'],
  ...['--out', at(`${lane}/tonight`), '--history', at(`${lane}/runs`)],
];

/** The same as the job takes it. */
const job = (lane: number, round: number): ScreenOptions => ({
  fleetPaths: [at('fleet.tle')],
  catalogPaths: [at('catalog.tle')],
  allOnAll: false,
  withinFleet: false,
  startMs: Date.parse(startOf(round)),
  days: 0.01,
  volume: { shape: 'SPHERE', missKm: 1000 },
  objectsPath: undefined,
  sigmaPath: undefined,
  maxAgeDays: 30,
  workers: 1,
  outPath: at(`${lane}/tonight`),
  historyPath: at(`${lane}/runs`),
  keepRuns: 2,
  alertPc: undefined,
  cdmFromPc: 0,
  top: 0,
});

/** The start of the run that stands in the output folder, after a look at every file of it and of the history. */
function standing(lane: number): string {
  const history = at(`${lane}/runs`);
  for (const name of readdirSync(history).filter((each) => !each.startsWith('.'))) {
    wholeRunIn(join(history, name), ['encounters.json']);
  }
  const record = wholeRunIn(at(`${lane}/tonight`));
  // Many small files, so that putting them in place takes a while.
  expect(record.counts.messages).toBeGreaterThan(10);
  return record.window.startUtc;
}

test(`killed at ${KILLS} random moments of its work`, async () => {
  const found = { old: 0, new: 0, lockLeft: 0 };
  const lane = async (number: number): Promise<void> => {
    let seed = 508 + number;
    const random = () => {
      seed = (Math.imul(seed, 1_664_525) + 1_013_904_223) >>> 0;
      return seed / 2 ** 32;
    };
    const lock = at(`${number}/tonight.lock`);
    const signs = [lock, at(`${number}/.tonight.partial/conjunctions.csv`)];
    // How long it takes from the lock, and from the first file of the results, to the end.
    const firstEnd = runCommand(command(number, 0));
    const sinceMs: number[] = [];
    for (const sign of signs) {
      while (!existsSync(sign)) await pause(1);
      sinceMs.push(performance.now());
    }
    const first = await firstEnd;
    const tookMs = sinceMs.map((ms) => performance.now() - ms);
    expect(first.status, first.stderr).toBe(0);
    let before = standing(number);
    expect(before).toBe(startOf(0));

    for (let round = 1; round <= KILLS / LANES; round++) {
      // Half of the moments are anywhere, half where files are written and put in place.
      const fromSign = round % 2;
      const left = signs.map(stamp)[fromSign];
      const child = spawn(process.execPath, [SCRIPT, JSON.stringify(job(number, round))]);
      const end = outcomeOf(child);
      while (child.exitCode === null && [undefined, left].includes(stamp(signs[fromSign]))) await pause(1);
      await pause(1.1 * tookMs[fromSign] * random());
      child.kill('SIGKILL');
      const { status, stderr } = await end;
      if (status !== null) expect(status, stderr).toBe(0);
      if (existsSync(lock)) found.lockLeft += 1;
      const now = standing(number);
      expect([before, startOf(round)]).toContain(now);
      if (status === 0) expect(now).toBe(startOf(round));
      found[now === before ? 'old' : 'new'] += 1;
      // The machine may have become slower or faster meanwhile.
      tookMs[fromSign] *= now === before ? 1.1 : 0.85;
      before = now;
    }
    const last = await runCommand(command(number, 59));
    expect(last.status, last.stderr).toBe(0);
    expect(standing(number)).toBe(startOf(59));
    expect(readdirSync(at(String(number))).sort()).toEqual(['runs', 'tonight']);
    expect(readdirSync(at(`${number}/runs`)).length).toBe(2);
  };
  await Promise.all(Array.from({ length: LANES }, (_, number) => lane(number)));
  // Not that all came too early or too late.
  expect(found.old).toBeGreaterThan(KILLS / 10);
  expect(found.new).toBeGreaterThan(KILLS / 10);
  expect(found.lockLeft).toBeGreaterThan(KILLS / 10);
}, 240_000);

/** Tells a file from one of the same name before it. */
function stamp(path: string): string | undefined {
  const status = statSync(path, { throwIfNoEntry: false });
  return status === undefined ? undefined : `${status.ino} ${status.mtimeMs}`;
}

const pause = (ms: number) => new Promise((resolve) => setTimeout(resolve, ms));
