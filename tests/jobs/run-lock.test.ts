import { existsSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { hostname, tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, expect, test } from 'vitest';
import { InputError } from '../../src/input-error.js';
import { takeLock } from '../../src/jobs/run-lock.js';
import { RunLockedError } from '../../src/jobs/run-locked-error.js';
import { silentPorts } from './silent-ports.js';

let folder = '';
let path = '';
beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), 'wideberth-lock-'));
  path = join(folder, 'tonight.lock');
});
afterEach(() => rmSync(folder, { recursive: true }));

test('the lock file says who holds it, and goes with the lock', async () => {
  const ports = silentPorts();
  const lock = await takeLock(path, 'tonight', ports);
  expect(JSON.parse(readFileSync(path, 'utf8'))).toEqual({
    pid: process.pid,
    host: hostname(),
    since: '2026-12-01T02:00:00.000Z',
  });
  lock.release();
  lock.release();
  expect(existsSync(path)).toBe(false);
  expect(ports.messages).toEqual([]);
});

test('a held lock is refused with its holder, and is free after its release', async () => {
  const lock = await takeLock(path, 'tonight', silentPorts());
  const second = takeLock(path, 'tonight', silentPorts());
  await expect(second).rejects.toThrow(RunLockedError);
  await expect(second).rejects.toThrow(
    `another run is at work on tonight: process ${process.pid} on ${hostname()} since 2026-12-01T02:00:00.000Z holds ${path}`,
  );
  lock.release();
  (await takeLock(path, 'tonight', silentPorts())).release();
});

test('a lock left behind is taken over and the log says from whom, even if its process number lives again', async () => {
  const left = { pid: process.pid, host: hostname(), since: '2026-11-30T02:00:00.000Z' };
  writeFileSync(path, JSON.stringify(left));
  const ports = silentPorts();
  const lock = await takeLock(path, 'tonight', ports);
  expect(ports.messages).toEqual([
    `taking over ${path}, left behind by process ${process.pid} on ${hostname()} since 2026-11-30T02:00:00.000Z, which is no longer running`,
  ]);
  expect(JSON.parse(readFileSync(path, 'utf8')).since).toBe('2026-12-01T02:00:00.000Z');
  lock.release();
});

test.each(['', '{"pid":', 'null', '[]', '{}'])('a damaged lock file (%j) is taken over', async (text) => {
  writeFileSync(path, text);
  (await takeLock(path, 'tonight', silentPorts())).release();
});

test('whoever waits gets the lock when it is given back', async () => {
  const lock = await takeLock(path, 'tonight', silentPorts());
  const waiting = takeLock(path, 'tonight', silentPorts(), 5000);
  setTimeout(lock.release, 120);
  (await waiting).release();
});

test('of many takers at once exactly one holds the lock at any time', async () => {
  let holders = 0;
  let most = 0;
  let taken = 0;
  await Promise.all(
    Array.from({ length: 20 }, async () => {
      const lock = await takeLock(path, 'tonight', silentPorts(), 30_000);
      most = Math.max(most, ++holders);
      taken++;
      await new Promise((resolve) => setImmediate(resolve));
      holders--;
      lock.release();
    }),
  );
  expect([most, taken]).toEqual([1, 20]);
});

test('a place where no lock can be made is an InputError', async () => {
  writeFileSync(join(folder, 'file'), '');
  const taken = takeLock(join(folder, 'file', 'x.lock'), 'x', silentPorts());
  await expect(taken).rejects.toThrow(InputError);
  await expect(taken).rejects.toThrow(/a part of the path is a file, not a folder.*\(ENOTDIR\)/);
});
