import { type ChildProcess, execFileSync, spawn, spawnSync } from 'node:child_process';
import { cpSync, existsSync, mkdirSync, readdirSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import {
  COMMAND,
  contentsOf,
  freshFolder,
  type Outcome,
  outcomeOf,
  rowsOf,
  runCommand,
  runRecordOf,
  SAMPLES,
  setsInText,
  startCommand,
  wholeRunIn,
} from '../cli/real-command.js';

/*
 * The real command as cron runs it: what it tells its caller, two runs at once, signals, full disks, closed
 * pipes, and a log that a collector can read.
 */

const inputs = freshFolder();
afterAll(inputs.remove);
const FLEET = join(inputs.path, 'fleet.tle');
const CATALOG = join(inputs.path, 'catalog.tle');

beforeAll(async () => {
  writeFileSync(FLEET, readFileSync(join(SAMPLES, 'fleet.tle')));
  const made = setsInText(readFileSync(join(SAMPLES, 'catalog.tle'), 'utf8')).filter(({ number }) =>
    /^(97|W90)/.test(number),
  );
  writeFileSync(CATALOG, made.map(({ text }) => text).join(''));
  before = await runCommand(screen(BEFORE, CATALOG));
  expect(before.status, before.stderr).toBe(0);
});

/** A run to stand in the output folder before a test. */
const BEFORE = join(inputs.path, 'before');
let before: Outcome;
function placeRunBefore(out: string): Record<string, string> {
  cpSync(BEFORE, out, { recursive: true });
  return contentsOf(out);
}

/** A place of its own for each test, for tests run side by side. */
type Place = { readonly path: string; readonly out: string };
const places: ReturnType<typeof freshFolder>[] = [];
function newPlace(): Place {
  const folder = freshFolder();
  places.push(folder);
  return { path: folder.path, out: join(folder.path, 'tonight') };
}

const children = new Set<ChildProcess>();
afterAll(() => {
  for (const child of children) child.kill('SIGKILL');
  for (const folder of places) folder.remove();
});

const screenFor = (out: string, days: number, catalog: string, ...more: string[]) => [
  ...['screen', '--fleet', FLEET, '--catalog', catalog, '--miss-km', '20', '--workers', '1'],
  ...['--start', '2026-12-01T00:00:00Z', '--days', String(days), '--out', out, ...more],
];
const screen = (out: string, catalog: string, ...more: string[]) => screenFor(out, 0.2, catalog, ...more);

/** A run that holds the lock and waits for its catalog on standard input, for as long as the test wants. */
async function waitingRun({ path, out }: Place): Promise<ChildProcess> {
  const child = spawn(process.execPath, [COMMAND, ...screen(out, '-')], { stdio: ['pipe', 'pipe', 'pipe'] });
  children.add(child);
  while (!existsSync(join(path, '.tonight.partial'))) await pause(10);
  return child;
}

/** Runs a line of bash, in which `"$0" "$@"` is the command. */
function inShell(script: string, args: readonly string[]): Promise<Outcome> {
  return outcomeOf(
    spawn('bash', ['-c', script, process.execPath, COMMAND, ...args], { stdio: ['ignore', 'pipe', 'pipe'] }),
  );
}

const pause = (ms: number) => new Promise((resolve) => setTimeout(resolve, ms));

test.concurrent('status 3 where an encounter reaches --alert-pc, 0 where none does', async () => {
  const { out } = newPlace();
  placeRunBefore(out);
  const [highest] = rowsOf(join(out, 'conjunctions.csv')).map((row) => Number(row.collision_probability));
  expect(highest).toBeGreaterThan(1e-5);

  const reached = await runCommand(screen(out, CATALOG, '--alert-pc', String(highest * 0.999)));
  expect(reached.status).toBe(3);
  expect(wholeRunIn(out).alert.reached).toBe(true);
  // What the engineer on duty is woken by says so.
  expect(reached.stdout).toMatch(
    /^Alert: 1 conjunction reaches the probability \S+ of --alert-pc,\nthe highest with \S+: 98018 QUILLMERE A 18 \/ 309007, TCA 2026-12-01T03:18:44Z\n\n/,
  );

  expect(reached.stderr).toMatch(/INFO: finished: .*, which reaches --alert-pc; results in \S+tonight\n$/);

  const missed = await runCommand(screen(out, CATALOG, '--alert-pc', String(highest * 1.001)));
  expect(missed.status).toBe(0);
  expect(wholeRunIn(out).alert.reached).toBe(false);
  expect(missed.stdout).not.toMatch(/^Alert/m);
});

test.concurrent('a second run of the same output ends with 4 and names the first, which goes on', async () => {
  const { path, out } = newPlace();
  const first = await waitingRun({ path, out });
  const second = await runCommand(screen(out, CATALOG));
  expect(second).toMatchObject({ status: 4, stdout: '' });
  expect(second.stderr).toMatch(
    new RegExp(
      `^\\[\\S+Z\\] ERROR: another run is at work on ${out}: process ${first.pid} on \\S+ since \\S+Z holds ${out}.lock; wait for it to end\\n$`,
    ),
  );
  expect(existsSync(out)).toBe(false);
  const end = outcomeOf(first);
  first.stdin?.end(readFileSync(CATALOG));
  expect((await end).status).toBe(0);
  wholeRunIn(out);
  expect(readdirSync(path)).toEqual(['tonight']);
});

describe.each([
  ['SIGINT', 130],
  ['SIGTERM', 143],
] as const)('%s', (signal, status) => {
  test.concurrent(`ends a run that reads with ${status}, and leaves the run before`, async () => {
    const { path, out } = newPlace();
    mkdirSync(out);
    const child = await waitingRun({ path, out });
    const end = outcomeOf(child);
    child.kill(signal);
    const outcome = await end;
    expect(outcome).toMatchObject({ status, stdout: '' });
    expect(outcome.stderr).toMatch(
      new RegExp(`^\\[\\S+Z\\] WARN: stopped by ${signal}: nothing of this run is kept\\n$`),
    );
    expect(readdirSync(path)).toEqual(['tonight']);
    expect(readdirSync(out)).toEqual([]);
  });

  test.concurrent(`ends a run in the middle of its search with ${status}, and leaves the run before`, async () => {
    const { path, out } = newPlace();
    const contents = placeRunBefore(out);
    // Far more than can be searched before the signal comes.
    const child = startCommand(screenFor(out, 60, CATALOG));
    children.add(child);
    const end = outcomeOf(child);
    child.stderr?.on('data', async (text: string) => {
      if (!text.includes('searching')) return;
      await pause(100);
      child.kill(signal);
    });
    expect(await end).toMatchObject({ status, stdout: '' });
    expect(readdirSync(path)).toEqual(['tonight']);
    expect(contentsOf(out)).toEqual(contents);
  });
});

describe('where nothing can be written', () => {
  test.concurrent('a file that outgrows the limit of the process ends with 2 and leaves the run before', async () => {
    const { path, out } = newPlace();
    const contents = placeRunBefore(out);
    // The limit counts kilobytes; the signal that comes with it is ignored, so that the write fails instead.
    const script = `ulimit -f 1; trap '' XFSZ; exec "$0" "$@"`;
    const { status, stdout, stderr } = await inShell(script, screen(out, CATALOG));
    expect({ status, stdout }).toEqual({ status: 2, stdout: '' });
    expect(stderr).toMatch(
      /ERROR: \S+conjunctions.csv: it grows beyond the largest size allowed for a file: .*\(EFBIG\)\n$/,
    );
    expect(readdirSync(path)).toEqual(['tonight']);
    expect(contentsOf(out)).toEqual(contents);
  });

  /** Mounts a small file system at the folder of the test; `false` where the user may not. */
  const mounted = (path: string, options: string) =>
    spawnSync('mount', ['-t', 'tmpfs', '-o', options, 'tmpfs', path]).status === 0;

  test.concurrent('a full disk ends with 2 and leaves the run before', async ({ skip }) => {
    const { path, out } = newPlace();
    if (!mounted(path, 'size=64k')) skip('this user may not mount a file system');
    try {
      const contents = placeRunBefore(out);
      const wider = await runCommand([...screen(out, CATALOG), '--cdm-from-pc', '0']);
      expect(wider).toMatchObject({ status: 2, stdout: '' });
      expect(wider.stderr).toMatch(
        /ERROR: \S+: no space is left on the device: free some and run again \(ENOSPC\)\n$/,
      );
      expect(readdirSync(path)).toEqual(['tonight']);
      expect(contentsOf(out)).toEqual(contents);
    } finally {
      execFileSync('umount', [path]);
    }
  });

  test.concurrent('a place that may not be written ends with 2 before any work', async ({ skip }) => {
    const { path, out } = newPlace();
    if (!mounted(path, 'size=64k,ro')) skip('this user may not mount a file system');
    try {
      const outcome = await runCommand(screen(out, CATALOG));
      expect(outcome).toMatchObject({ status: 2, stdout: '' });
      expect(outcome.stderr).toMatch(
        /^\[\S+Z\] ERROR: .*read-only file system: choose another place \(EROFS\)\n$/,
      );
    } finally {
      execFileSync('umount', [path]);
    }
  });
});

describe('what it prints', () => {
  test.concurrent('a satellite of the fleet that is not screened, or not to the end, is told in the log', async () => {
    const { out, path } = newPlace();
    const own = setsInText(readFileSync(FLEET, 'utf8'));
    const decaying = setsInText(readFileSync(CATALOG, 'utf8')).filter(({ number }) => number === '97061');
    const damaged = own[4].text.replace(/.\n$/, 'X\n');
    writeFileSync(
      join(path, 'mixed.tle'),
      [own[0].text, own[1].text, damaged, damaged, own[1].text.replace(/.\n$/, 'X\n'), decaying[0].text].join(
        '',
      ),
    );
    const { status, stdout, stderr } = await runCommand([
      ...['screen', '--fleet', join(path, 'mixed.tle'), '--catalog', CATALOG, '--out', out],
      ...['--start', '2026-12-02T12:00:00Z', '--days', '0.3', '--top', '0'],
    ]);
    expect(status, stderr).toBe(0);
    // 98002 has another set, which is used.
    expect(stderr).toMatch(
      /WARN: \S+mixed\.tle:7: 98005 of the fleet is rejected and so not screened: line 2, column 69: checksum "X".*; and 1 more, see unused-elements\.csv\n/,
    );
    expect(stderr).toMatch(/WARN: fleet, 97061 DUNMARROW 6 R\/B: SGP4 gives no state after 2026-12-02T15:1/);
    expect(stdout).toMatch(
      /^(No conjunctions in the window\.|\d+ conjunctions?, none of them shown here\.)\n\n/,
    );
    expect(stdout).toContain('1 of the used sets fails before the end of the window');
  });

  test.concurrent('a reader of the table that closes the pipe early is no failure', async () => {
    const { out } = newPlace();
    const script = `"$0" "$@" 2>/dev/null | head -n 1; echo "status \${PIPESTATUS[0]}"`;
    const { stdout } = await inShell(script, screen(out, CATALOG));
    expect(stdout).toMatch(
      /^\d+ conjunctions, by collision probability:\nstatus 0\n$|^The first 15 of .*\nstatus 0\n$/,
    );
    wholeRunIn(out);
  });

  test.concurrent('standard output closed from the start is none either', async () => {
    const { out } = newPlace();
    const script = `"$0" "$@" >&- 2>/dev/null; echo "status $?"`;
    const { stdout } = await inShell(script, screen(out, CATALOG));
    expect(stdout).toBe('status 0\n');
    wholeRunIn(out);
  });

  test.concurrent('--log json gives one JSON object a line, the table stays as it is', async () => {
    const { out } = newPlace();
    const json = await runCommand(screen(out, CATALOG, '--log', 'json'));
    expect(json.stdout.replace(out, BEFORE)).toBe(before.stdout);
    const lines = json.stderr.trimEnd().split('\n');
    expect(lines.length).toBe(before.stderr.trimEnd().split('\n').length);
    for (const line of lines) {
      expect(JSON.parse(line)).toMatchObject({
        level: expect.stringMatching(/^(info|warn)$/),
        time: expect.stringMatching(/^\d{4}-\d\d-\d\dT\d\d:\d\d:\d\d\.\d{3}Z$/),
        message: expect.stringMatching(/./),
      });
    }
    expect(runRecordOf(out).options).not.toHaveProperty('log');
  });

  test.concurrent('on a terminal the log is in color, but not against NO_COLOR', ({ skip }) => {
    const { out } = newPlace();
    // util-linux gives a process a terminal of its own; both outputs go through it.
    const onTerminal = (environment: Record<string, string>) =>
      spawnSync(
        'script',
        ['-qec', [process.execPath, COMMAND, ...screen(out, CATALOG)].join(' '), '/dev/null'],
        {
          encoding: 'utf8',
          env: { PATH: process.env.PATH, TERM: 'xterm', ...environment },
        },
      );
    const colored = onTerminal({});
    if (colored.error !== undefined || colored.status === 127) skip('no script command here');
    expect(colored.status).toBe(0);
    // biome-ignore lint/suspicious/noControlCharactersInRegex: color codes begin with ESC.
    const color = /\u001b\[\d\dm(INFO|WARN)/;
    expect(colored.stdout).toMatch(color);
    const plain = onTerminal({ NO_COLOR: '1' });
    expect(plain.status).toBe(0);
    expect(plain.stdout).toContain('INFO');
    expect(plain.stdout).not.toMatch(color);
  });
});
