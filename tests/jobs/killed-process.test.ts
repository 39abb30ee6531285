import { type ChildProcess, execFileSync, spawn, spawnSync } from 'node:child_process';
import { once } from 'node:events';
import {
  existsSync,
  mkdirSync,
  mkdtempSync,
  readdirSync,
  readFileSync,
  rmSync,
  writeFileSync,
} from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import { openOutputFolder } from '../../src/jobs/output-folder.js';
import { nightIn, writeNight } from './nights.js';
import { silentPorts } from './silent-ports.js';

const SCRIPT = 'tests/jobs/fixtures/nights-process.mjs';

let folder = '';
let out = '';
const children = new Set<ChildProcess>();
beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), 'wideberth-killed-'));
  out = join(folder, 'tonight');
});
afterEach(async () => {
  for (const child of children) child.kill('SIGKILL');
  children.clear();
  rmSync(folder, { recursive: true });
});

function start(...args: string[]): ChildProcess {
  const child = spawn(process.execPath, [SCRIPT, ...args], {
    stdio: ['ignore', 'pipe', 'pipe'],
  });
  children.add(child);
  child.on('exit', () => children.delete(child));
  return child;
}

const ready = (child: ChildProcess) => once(child.stdout!, 'data');

async function ended(child: ChildProcess): Promise<{ status: number | null; stderr: string }> {
  let stderr = '';
  child.stderr!.on('data', (text) => {
    stderr += text;
  });
  const [status] = await once(child, 'close');
  return { status, stderr };
}

async function publishHere(night: string, ports = silentPorts()): Promise<void> {
  const output = await openOutputFolder(out, ports);
  writeNight(output, night);
  output.publish();
  output.close();
}

const pause = (ms: number) => new Promise((resolve) => setTimeout(resolve, ms));

test('killed at any moment, a process leaves a whole run, and the next one takes over its lock', async () => {
  let seed = 508;
  const random = () => {
    seed = (seed * 1_103_515_245 + 12_345) % 2_147_483_648;
    return seed / 2_147_483_648;
  };
  await publishHere('first');
  writeFileSync(join(out, 'notes.txt'), 'keep me');
  let inTheMiddle = 0;
  for (let round = 0; round < 5; round++) {
    const child = start(out, 'loop', `round-${round}`);
    const end = ended(child);
    await ready(child);
    await pause(150 * random());
    child.kill('SIGKILL');
    await end;
    expect(nightIn(out, ['notes.txt'])).toMatch(new RegExp(`^round-${round}-`));
    if (existsSync(`${out}.lock`)) inTheMiddle++;
    const ports = silentPorts();
    await publishHere(`after-${round}`, ports);
    expect(nightIn(out, ['notes.txt'])).toBe(`after-${round}`);
    expect(readdirSync(folder)).toEqual(['tonight']);
    expect(readFileSync(join(out, 'notes.txt'), 'utf8')).toBe('keep me');
  }
  expect(inTheMiddle).toBeGreaterThan(0);
});

test.each([
  ['SIGINT', 130],
  ['SIGTERM', 143],
  ['SIGHUP', 129],
] as const)('%s ends a process with %i and leaves no lock and nothing unfinished', async (signal, status) => {
  await publishHere('first');
  const child = start(out, 'hold', 'second');
  const end = ended(child);
  await ready(child);
  expect(readdirSync(folder)).toEqual(['.tonight.partial', 'tonight', 'tonight.lock']);
  child.kill(signal);
  expect(await end).toMatchObject({ status, stderr: expect.stringContaining(`stopped by ${signal}`) });
  expect(readdirSync(folder)).toEqual(['tonight']);
  expect(nightIn(out)).toBe('first');
});

test('of two processes at once, the second is told who is at work', async () => {
  const first = start(out, 'hold', 'first');
  await ready(first);
  const { status, stderr } = await ended(start(out, 'once', 'second'));
  expect(status).toBe(4);
  expect(stderr).toContain(`another run is at work on ${out}: process ${first.pid} on `);
  expect(existsSync(out)).toBe(false);
});

test('the lock of a killed process is taken over and the log names that process', async () => {
  const first = start(out, 'hold', 'first');
  await ready(first);
  first.kill('SIGKILL');
  await once(first, 'close');
  const ports = silentPorts();
  await publishHere('second', ports);
  expect(ports.messages[0]).toMatch(
    new RegExp(`^taking over .*tonight\\.lock, left behind by process ${first.pid} on `),
  );
  expect(nightIn(out)).toBe('second');
});

test('a file that outgrows the limit of the process leaves the run before', async () => {
  await publishHere('first');
  // The limit counts kilobytes; the signal that comes with it is ignored, so that the write fails instead.
  const script = `ulimit -f 64; trap '' XFSZ; exec "$0" ${SCRIPT} "$1" once second 200000`;
  const { status, stderr } = spawnSync('bash', ['-c', script, process.execPath, out], { encoding: 'utf8' });
  expect(status).toBe(2);
  expect(stderr).toContain('large.csv: it grows beyond the largest size allowed for a file');
  expect(nightIn(out)).toBe('first');
  expect(readdirSync(folder)).toEqual(['tonight']);
});

/** Mounts a small file system for one test; `false` where the user may not. */
function mounted(options: string): boolean {
  const { status } = spawnSync('mount', ['-t', 'tmpfs', '-o', options, 'tmpfs', folder]);
  return status === 0;
}

describe('on a file system of its own (needs the right to mount)', () => {
  test('a full disk leaves the run before, and the message says what to do', async ({ skip }) => {
    if (!mounted('size=128k')) skip('this user may not mount a file system');
    try {
      await publishHere('first');
      const output = await openOutputFolder(out, silentPorts());
      const stream = output.stream('conjunctions.csv');
      const failed = once(stream, 'error');
      stream.write('x'.repeat(400_000));
      const [error] = await failed;
      output.close();
      expect((error as Error).name).toBe('InputError');
      expect((error as Error).message).toBe(
        `${join(out, 'conjunctions.csv')}: no space is left on the device: free some and run again (ENOSPC)`,
      );
      expect(nightIn(out)).toBe('first');
      expect(readdirSync(folder)).toEqual(['tonight']);
      await publishHere('second');
      expect(nightIn(out)).toBe('second');
    } finally {
      execFileSync('umount', [folder]);
    }
  });

  test('a read-only place is refused before any work', async ({ skip }) => {
    if (!mounted('size=128k,ro')) skip('this user may not mount a file system');
    try {
      await expect(openOutputFolder(out, silentPorts())).rejects.toThrow(/read-only file system.*\(EROFS\)/);
    } finally {
      execFileSync('umount', [folder]);
    }
  });

  test('a mount point is refused before any work', async ({ skip }) => {
    if (!mounted('size=128k')) skip('this user may not mount a file system');
    try {
      out = folder;
      await expect(openOutputFolder(out, silentPorts())).rejects.toThrow(
        /mount point of a file system: name a folder inside/,
      );
    } finally {
      execFileSync('umount', [folder]);
    }
  });
});

test('a folder without write permission is refused before any work', async ({ skip }) => {
  if (process.getuid?.() === 0) skip('permissions do not hold for root');
  const closed = join(folder, 'closed');
  mkdirSync(closed, { mode: 0o555 });
  await expect(openOutputFolder(join(closed, 'tonight'), silentPorts())).rejects.toThrow(
    /may not be written.*\(EACCES\)/,
  );
});
