import { chmodSync, mkdirSync, readdirSync, realpathSync, renameSync, rmSync, statSync } from 'node:fs';
import { basename, dirname, join, resolve } from 'node:path';
import { Writable } from 'node:stream';
import { InputError } from '../input-error.js';
import { onFiles } from './file-errors.js';
import { nativeFileSystem } from './native-file-system.js';
import {
  exists,
  filesOfRun,
  foreignEntries,
  freeName,
  moveForeignEntries,
  type OpenRunFile,
  openRunFile,
  RUN_RECORD,
  type RunFile,
  syncFolder,
  syncFolders,
} from './run-folder.js';
import { type RunLock, takeLock } from './run-lock.js';
import type { JobPorts } from './screen-options.js';

export type OutputFolder = {
  /** Where the files stand until `publish`. */
  readonly staging: string;
  /** Writes one file of the run; `name` may lie in a subfolder (`cdm/0001.kvn`). */
  readonly write: (name: string, content: string | Iterable<string>) => void;
  /** The same for what comes bit by bit: the file counts when the stream has finished. */
  readonly stream: (name: string) => Writable;
  /** Writes `run.json` last, from the list of all other files; after it nothing can be written. */
  readonly seal: (record: (files: readonly RunFile[]) => string) => void;
  /** Puts the run in the place of the one before, as a whole. */
  readonly publish: () => void;
  /** Removes what was not published and gives the lock back; a second call does nothing. */
  readonly close: () => void;
};

type Places = {
  /** The folder as the user named it, for messages. */
  readonly named: string;
  readonly target: string;
  readonly parent: string;
  /** Only ever holds files of this program: may be removed at any time by the holder of the lock. */
  readonly staging: string;
  /** Holds a whole run: the new one until the swap, the one before after it. */
  readonly swap: string;
  /** Holds the whole run before, where the file system cannot swap. */
  readonly previous: string;
  readonly lock: string;
};

/**
 * Opens the folder in which a job leaves its results. Until `publish`, they stand in a hidden folder beside
 * it; `publish` then swaps the two folders in one step (renameat2 with RENAME_EXCHANGE, renamex_np with
 * RENAME_SWAP). So whoever reads the folder finds the files of one run, all of them, at every moment and
 * whatever kills this process: replacing file by file would mix two nights, and a symbolic link in the place
 * of the folder would break when someone moves it into an archive.
 *
 * A file system that cannot swap (some network ones) gets two renames one after the other; a process killed
 * between these leaves no folder, and the next start puts the new run there.
 *
 * The hidden folder lies beside the target, because only within one file system can it be moved in one step.
 * Files that no run wrote are kept: they move into the new folder. A folder that holds files but no run of
 * this program is refused.
 *
 * @throws InputError when the place cannot be used; RunLockedError when another run holds it.
 */
export async function openOutputFolder(out: string, ports: JobPorts): Promise<OutputFolder> {
  const places = placesOf(out);
  const lock = await takeLock(places.lock, places.named, ports);
  try {
    return onFiles(out, () => {
      recover(places, ports);
      checkTarget(places);
      mkdirSync(places.staging);
      return openFolder(places, lock, ports);
    });
  } catch (error) {
    lock.release();
    throw error;
  }
}

/** Does the work of a job in its output folder, which is closed whatever becomes of it. */
export async function withOutputFolder<T>(
  out: string,
  ports: JobPorts,
  work: (folder: OutputFolder) => Promise<T>,
): Promise<T> {
  const folder = await openOutputFolder(out, ports);
  try {
    return await work(folder);
  } finally {
    folder.close();
  }
}

function openFolder(places: Places, lock: RunLock, ports: JobPorts): OutputFolder {
  const files: RunFile[] = [];
  const unfinished = new Map<string, OpenRunFile>();
  let sealed = false;
  const close = (): void => {
    forget();
    for (const file of unfinished.values()) file.abandon();
    rmSync(places.staging, { recursive: true, force: true });
    lock.release();
  };
  const forget = ports.onStop(close);
  const open = (name: string): OpenRunFile => {
    if (sealed) throw new Error(`${name} comes after ${RUN_RECORD}`);
    const file = openRunFile(places.staging, name);
    unfinished.set(name, file);
    return file;
  };
  const finish = (name: string, file: OpenRunFile): void => {
    files.push(file.finish());
    unfinished.delete(name);
  };
  const write = (name: string, content: string | Iterable<string>): void =>
    onFiles(join(places.named, name), () => {
      const file = open(name);
      for (const chunk of typeof content === 'string' ? [content] : content) file.append(chunk);
      finish(name, file);
    });
  return {
    staging: places.staging,
    write,
    stream: (name) => {
      const onFile = <T>(work: () => T): T => onFiles(join(places.named, name), work);
      const file = onFile(() => open(name));
      return sinkOf(
        (chunk) => onFile(() => file.append(chunk)),
        () => onFile(() => finish(name, file)),
      );
    },
    seal: (record) => {
      if (unfinished.size > 0) throw new Error(`${[...unfinished.keys()]} not finished before ${RUN_RECORD}`);
      files.sort((a, b) => (a.name < b.name ? -1 : 1));
      write(RUN_RECORD, record([...files]));
      sealed = true;
      onFiles(places.named, () => syncFolders(places.staging));
    },
    publish: () => {
      if (!sealed) throw new Error('nothing is published before it is sealed');
      try {
        onFiles(places.named, () => replaceTarget(places, ports));
      } catch (error) {
        keepUnpublished(places, ports);
        throw error;
      }
    },
    close,
  };
}

function sinkOf(append: (chunk: Uint8Array) => void, finish: () => void): Writable {
  const attempt = (work: () => void, done: (error?: Error) => void): void => {
    try {
      work();
      done();
    } catch (error) {
      done(error as Error);
    }
  };
  return new Writable({
    write: (chunk: Uint8Array, _encoding, done) => attempt(() => append(chunk), done),
    final: (done) => attempt(finish, done),
  });
}

function placesOf(out: string): Places {
  return onFiles(out, () => {
    const absolute = resolve(out);
    if (basename(absolute) === '') throw new InputError(`--out is ${out}: name a folder below it`);
    mkdirSync(dirname(absolute), { recursive: true });
    // However the folder is spelled, and through whatever link, the lock beside it is the same one.
    const target = exists(absolute)
      ? realpathSync(absolute)
      : join(realpathSync(dirname(absolute)), basename(absolute));
    const [parent, name] = [dirname(target), basename(target)];
    return {
      named: out,
      target,
      parent,
      staging: join(parent, `.${name}.partial`),
      swap: join(parent, `.${name}.swap`),
      previous: join(parent, `.${name}.previous`),
      lock: join(parent, `${name}.lock`),
    };
  });
}

/** Ends what a killed run left in the middle; called by the holder of the lock. */
function recover(places: Places, ports: Pick<JobPorts, 'log'>): void {
  const { target, staging, swap, previous, named } = places;
  if (exists(staging)) {
    rmSync(staging, { recursive: true });
    ports.log.info(`removed the unfinished files of an earlier run for ${named}`);
  }
  if (!exists(target)) {
    const whole = [swap, previous].find((folder) => filesOfRun(folder) !== undefined);
    if (whole !== undefined) {
      renameSync(whole, target);
      ports.log.warn(`${named} was missing: put back the whole run found beside it`);
    }
  }
  for (const folder of [swap, previous]) removeReplaced(folder, places, ports);
}

function checkTarget({ target, parent, named }: Places): void {
  if (!exists(target)) return;
  const status = statSync(target);
  if (!status.isDirectory()) throw new InputError(`--out is ${named}, which is a file: name a folder`);
  if (status.dev !== statSync(parent).dev) {
    throw new InputError(`--out is ${named}, the mount point of a file system: name a folder inside it`);
  }
  if (readdirSync(target).length > 0 && filesOfRun(target) === undefined) {
    throw new InputError(
      `--out is ${named}, which holds files but no ${RUN_RECORD} of wideberth: name an empty or a new folder`,
    );
  }
}

function replaceTarget(places: Places, ports: Pick<JobPorts, 'log'>): void {
  const { target, parent, staging, swap, previous } = places;
  checkTarget(places);
  if (!exists(target) || readdirSync(target).length === 0) {
    if (exists(target)) chmodSync(staging, statSync(target).mode & 0o7777);
    renameSync(staging, target);
    syncFolder(parent);
    return;
  }
  refuseTakenNames(places);
  chmodSync(staging, statSync(target).mode & 0o7777);
  renameSync(staging, swap);
  try {
    nativeFileSystem().swapSync(swap, target);
  } catch (error) {
    if (
      !['EINVAL', 'ENOSYS', 'ENOTSUP', 'EOPNOTSUPP'].includes((error as NodeJS.ErrnoException).code ?? '')
    ) {
      renameSync(swap, staging);
      throw error;
    }
    renameSync(target, previous);
    renameSync(swap, target);
  }
  syncFolder(parent);
  try {
    for (const folder of [swap, previous]) removeReplaced(folder, places, ports);
  } catch (error) {
    ports.log.warn(
      `the new run is in place, but the one before could not be removed: ${(error as Error).message}`,
    );
  }
}

/** The work of hours is not thrown away because the folder has become unusable in the meantime. */
function keepUnpublished({ target, staging }: Places, ports: Pick<JobPorts, 'log'>): void {
  if (!exists(staging)) return;
  const kept = join(dirname(target), freeName(dirname(target), `${basename(target)}.unpublished`));
  renameSync(staging, kept);
  ports.log.error(`the results of this run are in ${kept}`);
}

/** Refuses before the swap what could only be kept under another name after it. */
function refuseTakenNames({ target, staging, named }: Places): void {
  const own = filesOfRun(target)!;
  for (const name of foreignEntries(target, own)) {
    if (exists(join(staging, name))) {
      throw new InputError(
        `${join(named, name)} stands in the way and was not written by wideberth: move it away`,
      );
    }
  }
}

/** Removes a run that was replaced, after what others put into its folder has moved to the new one. */
function removeReplaced(
  folder: string,
  { target, staging, named }: Places,
  ports: Pick<JobPorts, 'log'>,
): void {
  const own = exists(folder) ? filesOfRun(folder) : undefined;
  if (own === undefined) return;
  for (const name of moveForeignEntries(folder, own, target)) {
    ports.log.info(`kept ${join(named, name)}, which wideberth did not write`);
  }
  renameSync(folder, staging);
  rmSync(staging, { recursive: true });
}
