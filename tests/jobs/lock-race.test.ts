import { existsSync, mkdtempSync, readFileSync, rmSync, unlinkSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { expect, test, vi } from 'vitest';
import { takeLock } from '../../src/jobs/run-lock.js';
import { silentPorts } from './silent-ports.js';

const race = vi.hoisted(() => ({ beforeLock: () => {} }));

vi.mock('../../src/jobs/native-file-system.js', async (importOriginal) => {
  const { nativeFileSystem } = await importOriginal<typeof import('../../src/jobs/native-file-system.js')>();
  return {
    nativeFileSystem: () => ({
      ...nativeFileSystem(),
      tryLock: (fd: number) => {
        race.beforeLock();
        return nativeFileSystem().tryLock(fd);
      },
    }),
  };
});

test.each([
  ['is gone', (path: string) => unlinkSync(path)],
  [
    'is another',
    (path: string) => {
      unlinkSync(path);
      writeFileSync(path, '');
    },
  ],
])('a file that %s between its opening and its locking does not count as the lock', async (_, change) => {
  const folder = mkdtempSync(join(tmpdir(), 'wideberth-race-'));
  const path = join(folder, 'tonight.lock');
  race.beforeLock = () => {
    race.beforeLock = () => {};
    change(path);
  };
  const lock = await takeLock(path, 'tonight', silentPorts());
  expect(JSON.parse(readFileSync(path, 'utf8')).pid).toBe(process.pid);
  await expect(takeLock(path, 'tonight', silentPorts())).rejects.toThrow('another run is at work');
  lock.release();
  expect(existsSync(path)).toBe(false);
  rmSync(folder, { recursive: true });
});
