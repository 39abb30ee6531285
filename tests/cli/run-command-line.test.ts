import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, test, vi } from 'vitest';
import { CAUTION } from '../../src/caution.js';
import { InputError } from '../../src/input-error.js';
import { RunLockedError } from '../../src/jobs/run-locked-error.js';
import { screen } from '../../src/jobs/screen.js';
import { runInMemory } from './run-in-memory.js';

vi.mock('../../src/jobs/screen.js', () => ({ screen: vi.fn() }));
const screenJob = vi.mocked(screen);

let folder = '';
beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), 'wideberth-cli-'));
  screenJob.mockReset().mockResolvedValue({ lines: ['a table'], alertReached: false });
});
afterEach(() => rmSync(folder, { recursive: true }));

const NEEDED = ['--fleet', 'fleet.tle', '--catalog', 'catalog.tle', '--out', 'tonight'];
const optionsSeen = () => screenJob.mock.calls[0][0];

function configured(contents: object): string {
  const path = join(folder, 'nightly.json');
  writeFileSync(path, JSON.stringify(contents));
  return path;
}

describe('screen', () => {
  test('gets complete options, prints the lines of the job and ends with 0', async () => {
    expect(await runInMemory('screen', ...NEEDED)).toEqual({ status: 0, stdout: 'a table\n', stderr: '' });
    expect(optionsSeen()).toMatchObject({
      fleetPaths: ['fleet.tle'],
      catalogPaths: ['catalog.tle'],
      allOnAll: false,
      withinFleet: false,
      startMs: Date.UTC(2026, 11, 1, 6, 30),
      days: 7,
      volume: { shape: 'SPHERE', missKm: 5 },
      maxAgeDays: 30,
      outPath: 'tonight',
      keepRuns: undefined,
      alertPc: undefined,
      top: 15,
    });
    expect(optionsSeen().workers).toBeGreaterThanOrEqual(1);
  });

  test('takes several files, also by a pattern of the shell, and - for standard input', async () => {
    await runInMemory(
      'screen',
      '--fleet',
      'a.tle',
      '--fleet',
      'b.tle',
      '--catalog',
      'c.tle',
      'd.tle',
      '-',
      '--out',
      'o',
    );
    expect(optionsSeen().fleetPaths).toEqual(['a.tle', 'b.tle']);
    expect(optionsSeen().catalogPaths).toEqual(['c.tle', 'd.tle', '-']);
  });

  test('takes a volume in place of a distance', async () => {
    await runInMemory('screen', ...NEEDED, '--volume-rtn-km', '0.4,25,20', '--volume-shape', 'ELLIPSOID');
    expect(optionsSeen().volume).toEqual({ shape: 'ELLIPSOID', halfSizeRtnKm: [0.4, 25, 20] });
  });

  test('ends with 3 when the alert is reached', async () => {
    screenJob.mockResolvedValue({ lines: [], alertReached: true });
    expect((await runInMemory('screen', ...NEEDED, '--alert-pc', '1e-4')).status).toBe(3);
    expect(optionsSeen().alertPc).toBe(1e-4);
  });

  test.each([
    [new InputError('fleet.tle, line 3: no'), 2, 'ERROR: fleet.tle, line 3: no'],
    [new RunLockedError('another run'), 4, 'ERROR: another run'],
    [new TypeError('oops'), 1, 'ERROR: unexpected error'],
  ])('turns %s into status %i', async (error, status, line) => {
    screenJob.mockRejectedValue(error);
    const outcome = await runInMemory('screen', ...NEEDED);
    expect(outcome).toMatchObject({ status, stdout: '' });
    expect(outcome.stderr).toContain(line);
    const isReportable = ['please report it', 'TypeError: oops', 'run-command-line.test.ts'].every((text) =>
      outcome.stderr.includes(text),
    );
    expect(isReportable).toBe(status === 1);
  });

  test('logs JSON objects when asked to, on standard error', async () => {
    screenJob.mockImplementation(async (_options, ports) => {
      ports.log.warn('watch out', { objects: 2 });
      return { lines: [], alertReached: false };
    });
    const { stderr } = await runInMemory('screen', ...NEEDED, '--log', 'json');
    expect(JSON.parse(stderr)).toEqual({
      level: 'warn',
      time: '2026-12-01T06:30:59.000Z',
      message: 'watch out',
      objects: 2,
    });
  });

  test.each([
    [['--catalog', 'c', '--out', 'o'], 'no fleet: give --fleet FILE, or --all-on-all'],
    [['--fleet', 'f', '--out', 'o'], 'no catalog: give --catalog FILE, or --within-fleet'],
    [['--all-on-all', '--out', 'o'], 'no catalog: give --catalog FILE'],
    [['--fleet', '-', '--catalog', '-', '--out', 'o'], '- (standard input) is named more than once'],
    [['--fleet', 'f', '--catalog', 'c'], 'no place for the results: give --out DIR'],
    [[...NEEDED, '--keep-runs', '3'], '--keep-runs is 3, but there is no --history DIR'],
    [[...NEEDED, '--history', './tonight/'], '--out and --history are both tonight'],
    [[...NEEDED, '--volume-shape', 'BOX'], '--volume-shape is BOX, but its size is missing'],
    [
      [...NEEDED, '--miss-km', '1', '--volume-rtn-km', '1,2,3'],
      '--miss-km and --volume-rtn-km exclude each other',
    ],
    [[...NEEDED, '--all-on-all'], '--all-on-all and --fleet exclude each other'],
    [[...NEEDED, '--days', '-3'], '--days is -3: it must be'],
    [[...NEEDED, '--days', '3', '--days', '4'], '--days is given 2 times (3, 4)'],
    [[...NEEDED, '--days'], '--days needs a value'],
    [[...NEEDED, '--log', 'xml'], '--log is xml: it must be text or json'],
    [[...NEEDED, '--mis-km', '5'], 'unknown option --mis-km: did you mean --miss-km?'],
    [[...NEEDED, '--mis-km=5'], 'unknown option --mis-km: did you mean --miss-km?'],
    [[...NEEDED, '--constructor', '5'], 'unknown option --constructor: see wideberth screen --help'],
    [[...NEEDED, '-f', 'x'], 'unknown option -f'],
    [[...NEEDED, 'stray'], 'stray'],
    [['--config', 'none.json'], '--config none.json: cannot be read (ENOENT)'],
  ])('refuses %j', async (args, message) => {
    const outcome = await runInMemory('screen', ...args);
    expect(outcome).toMatchObject({ status: 2, stdout: '' });
    expect(outcome.stderr).toContain(message);
    expect(outcome.stderr.trim().split('\n')).toHaveLength(1);
    expect(screenJob).not.toHaveBeenCalled();
  });
});

test('a mistake in the options is a JSON line too when JSON is asked for', async () => {
  for (const args of [
    ['--log', 'json', '--bogus'],
    ['--log=json', '--days', '-1'],
  ]) {
    const { status, stderr } = await runInMemory('screen', ...NEEDED, ...args);
    expect(status).toBe(2);
    expect(JSON.parse(stderr)).toMatchObject({ level: 'error', message: expect.any(String) });
  }
});

describe('a configuration file', () => {
  test('gives every option, and the command line wins', async () => {
    const path = configured({
      fleet: 'f.tle',
      catalog: 'c.tle',
      out: 'tonight',
      days: 3,
      'miss-km': 2,
      log: 'json',
    });
    await runInMemory('screen', '--config', path, '--days', '1');
    expect(optionsSeen()).toMatchObject({
      fleetPaths: [join(folder, 'f.tle')],
      outPath: join(folder, 'tonight'),
      days: 1,
      volume: { shape: 'SPHERE', missKm: 2 },
    });
  });

  test('gives way where the command line chooses the alternative, and the log says so', async () => {
    const path = configured({ fleet: 'f.tle', catalog: 'c.tle', out: 'tonight', 'miss-km': 2 });
    const { status, stderr } = await runInMemory(
      'screen',
      '--config',
      path,
      '--volume-rtn-km',
      '1,2,3',
      '--all-on-all',
    );
    expect(status).toBe(0);
    expect(optionsSeen()).toMatchObject({ fleetPaths: [], allOnAll: true, volume: { shape: 'BOX' } });
    expect(stderr).toContain('"miss-km" gives way to --volume-rtn-km');
    expect(stderr).toContain('"fleet" gives way to --all-on-all');
  });

  test('may not hold two alternatives', async () => {
    const path = configured({
      fleet: 'f.tle',
      catalog: 'c.tle',
      out: 'o',
      'miss-km': 2,
      'volume-rtn-km': [1, 2, 3],
    });
    const { status, stderr } = await runInMemory('screen', '--config', path);
    expect(status).toBe(2);
    expect(stderr).toMatch(/"miss-km" and .*"volume-rtn-km" exclude each other/);
  });
});

describe('the program', () => {
  test.each([[['--help']], [['screen', '--help']]])('teaches the job in one screen: %j', async (args) => {
    const { status, stdout } = await runInMemory(...args);
    const lines = stdout.trimEnd().split('\n');
    expect(status).toBe(0);
    expect(lines.length).toBeGreaterThanOrEqual(24);
    expect(lines.length).toBeLessThanOrEqual(40);
    expect(Math.max(...lines.map((line) => line.length))).toBeLessThanOrEqual(80);
    expect(stdout.replace(/\s+/g, ' ')).toContain(CAUTION);
    expect(stdout).toContain('Exit status');
  });

  test('tells its version', async () => {
    expect(await runInMemory('--version')).toEqual({ status: 0, stdout: '1.2.3\n', stderr: '' });
  });

  test.each([
    [[], 'name a command first: screen'],
    [['scren'], 'unknown command scren: did you mean screen?'],
    [['--fleet', 'x'], 'name a command first'],
  ])('refuses %j', async (args, message) => {
    const outcome = await runInMemory(...args);
    expect(outcome).toMatchObject({ status: 2, stdout: '' });
    expect(outcome.stderr).toContain(message);
  });
});
