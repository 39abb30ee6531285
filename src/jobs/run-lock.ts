import {
  closeSync,
  fstatSync,
  ftruncateSync,
  openSync,
  readFileSync,
  statSync,
  unlinkSync,
  writeSync,
} from 'node:fs';
import { hostname } from 'node:os';
import { setTimeout as pause } from 'node:timers/promises';
import { onFiles } from './file-errors.js';
import { nativeFileSystem } from './native-file-system.js';
import { RunLockedError } from './run-locked-error.js';
import type { JobPorts } from './screen-options.js';

const POLL_MS = 50;

export type RunLock = {
  readonly path: string;
  /** Gives the lock back and removes its file; a second call does nothing. */
  readonly release: () => void;
};

type Holder = { readonly pid: number; readonly host: string; readonly since: string };

/**
 * Takes the lock file `path` for this process.
 *
 * The lock is the kernel's (fcntl on Linux, flock on macOS), not the existence of the file: it ends with the
 * process that holds it, however that ended. So there is nothing to judge about a file that was left behind:
 * no process number that may have been given to another process or belongs to another container, no
 * heartbeat that a jumping clock makes look stale. What stands in the file only tells people who holds it.
 *
 * @param subject what is locked, for messages
 * @param waitMs how long to wait for another holder before giving up
 * @throws RunLockedError when another process holds it; InputError when the file cannot be made.
 */
export async function takeLock(
  path: string,
  subject: string,
  ports: Pick<JobPorts, 'log' | 'nowMs'>,
  waitMs = 0,
): Promise<RunLock> {
  const { tryLock } = nativeFileSystem();
  for (let waitedMs = 0; ; ) {
    const fd = onFiles(path, () => openSync(path, 'a+', 0o666));
    let kept = false;
    try {
      if (onFiles(`cannot lock ${path}`, () => tryLock(fd))) {
        // Whoever held it may have removed the file between the opening and the locking of it here.
        if (!isStillAt(path, fd)) continue;
        const left = holderIn(readFileSync(fd, 'utf8'));
        if (left !== undefined) {
          ports.log.warn(`taking over ${path}, left behind by ${inWords(left)}, which is no longer running`);
        }
        onFiles(path, () => writeHolder(fd, ports.nowMs()));
        kept = true;
        return { path, release: releaseOnce(path, fd) };
      }
    } finally {
      if (!kept) closeSync(fd);
    }
    // A holder that has only just begun gets the time to write its name.
    await pause(POLL_MS);
    waitedMs += POLL_MS;
    if (waitedMs >= waitMs) throw new RunLockedError(lockedMessage(path, subject));
  }
}

function isStillAt(path: string, fd: number): boolean {
  const own = fstatSync(fd);
  const there = statSync(path, { throwIfNoEntry: false });
  return there !== undefined && there.ino === own.ino && there.dev === own.dev;
}

function writeHolder(fd: number, nowMs: number): void {
  const holder: Holder = { pid: process.pid, host: hostname(), since: new Date(nowMs).toISOString() };
  ftruncateSync(fd);
  writeSync(fd, `${JSON.stringify(holder)}\n`);
}

function releaseOnce(path: string, fd: number): () => void {
  let held = true;
  return () => {
    if (!held) return;
    held = false;
    try {
      // Removed while still locked: nobody can have taken this very file in between.
      unlinkSync(path);
    } catch {
      // Gone already, or the folder became read-only: the lock itself ends with the line below.
    }
    closeSync(fd);
  };
}

function lockedMessage(path: string, subject: string): string {
  let holder: Holder | undefined;
  try {
    holder = holderIn(readFileSync(path, 'utf8'));
  } catch {
    // Released this moment.
  }
  const who = holder === undefined ? 'another process' : inWords(holder);
  return `another run is at work on ${subject}: ${who} holds ${path}; wait for it to end`;
}

function holderIn(text: string): Holder | undefined {
  try {
    const { pid, host, since } = JSON.parse(text) as Partial<Holder>;
    return pid === undefined || host === undefined || since === undefined ? undefined : { pid, host, since };
  } catch {
    return undefined;
  }
}

function inWords({ pid, host, since }: Holder): string {
  return `process ${pid} on ${host} since ${since}`;
}
