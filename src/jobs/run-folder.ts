import { createHash } from 'node:crypto';
import {
  closeSync,
  fsyncSync,
  lstatSync,
  mkdirSync,
  openSync,
  readdirSync,
  readFileSync,
  renameSync,
  writeSync,
} from 'node:fs';
import { dirname, join } from 'node:path';

/** The file that makes a folder a run of this program; written last, it lists every other file. */
export const RUN_RECORD = 'run.json';

export type RunFile = {
  /** Path within the folder, with `/`. */
  readonly name: string;
  readonly bytes: number;
  /** Hexadecimal. */
  readonly sha256: string;
};

export type OpenRunFile = {
  readonly append: (chunk: string | Uint8Array) => void;
  /** Brings the file to the disk, not only to the cache, and tells its size and hash. */
  readonly finish: () => RunFile;
  /** Closes it as it stands; after `finish` or a second time it does nothing. */
  readonly abandon: () => void;
};

/**
 * Opens one new file of a run. All its work is synchronous, so that nothing is under way in the background
 * when a signal has everything removed.
 */
export function openRunFile(folder: string, name: string): OpenRunFile {
  const path = join(folder, name);
  mkdirSync(dirname(path), { recursive: true });
  const hash = createHash('sha256');
  let bytes = 0;
  const fd = openSync(path, 'wx', 0o666);
  let open = true;
  const abandon = (): void => {
    if (!open) return;
    open = false;
    closeSync(fd);
  };
  return {
    append: (text) => {
      const chunk = typeof text === 'string' ? Buffer.from(text, 'utf8') : text;
      for (let written = 0; written < chunk.length; ) written += writeSync(fd, chunk, written);
      hash.update(chunk);
      bytes += chunk.length;
    },
    finish: () => {
      fsyncSync(fd);
      abandon();
      return { name, bytes, sha256: hash.digest('hex') };
    },
    abandon,
  };
}

/** Makes sure that the entries of a folder, new names among them, are on the disk. */
export function syncFolder(folder: string): void {
  const fd = openSync(folder, 'r');
  try {
    fsyncSync(fd);
  } catch (error) {
    // Some network file systems cannot do this for a folder; there is nothing else to call then.
    if (!['EINVAL', 'ENOTSUP', 'EBADF'].includes((error as NodeJS.ErrnoException).code ?? '')) throw error;
  } finally {
    closeSync(fd);
  }
}

/** Brings a file that something else wrote to the disk. */
export function syncFile(path: string): void {
  const fd = openSync(path, 'r+');
  try {
    fsyncSync(fd);
  } finally {
    closeSync(fd);
  }
}

/** `syncFolder` for a folder and all folders in it. */
export function syncFolders(folder: string): void {
  for (const entry of readdirSync(folder, { withFileTypes: true })) {
    if (entry.isDirectory()) syncFolders(join(folder, entry.name));
  }
  syncFolder(folder);
}

/**
 * The names of the files that a run left in `folder`, its record among them; `undefined` when no run of
 * this program stands there.
 */
export function filesOfRun(folder: string): Set<string> | undefined {
  let record: unknown;
  try {
    record = JSON.parse(readFileSync(join(folder, RUN_RECORD), 'utf8'));
  } catch {
    return undefined;
  }
  const { program, files } = (record ?? {}) as { program?: unknown; files?: unknown };
  if (program !== 'wideberth' || !Array.isArray(files)) return undefined;
  const names = files.map((file: unknown) => (file as { name?: unknown } | null)?.name);
  if (!names.every((name) => typeof name === 'string')) return undefined;
  return new Set([RUN_RECORD, ...(names as string[])]);
}

/**
 * Names in `folder` of what no run wrote, with `/`; of a folder that holds nothing of a run only the name
 * of that folder.
 *
 * @param own the files of the run
 */
export function foreignEntries(folder: string, own: ReadonlySet<string>, below = ''): string[] {
  return readdirSync(join(folder, below), { withFileTypes: true }).flatMap((entry) => {
    const name = below === '' ? entry.name : `${below}/${entry.name}`;
    if (own.has(name)) return [];
    const holdsOwn = entry.isDirectory() && [...own].some((file) => file.startsWith(`${name}/`));
    return holdsOwn ? foreignEntries(folder, own, name) : [name];
  });
}

/**
 * Moves what no run wrote from one folder to another; where the name is taken there, under a new name.
 *
 * @returns the names under which it stands now
 */
export function moveForeignEntries(from: string, own: ReadonlySet<string>, to: string): string[] {
  return foreignEntries(from, own).map((name) => {
    const free = freeName(to, name);
    mkdirSync(dirname(join(to, free)), { recursive: true });
    renameSync(join(from, name), join(to, free));
    return free;
  });
}

/** `name`, or `name.2`, `name.3` and so on where that is taken. */
export function freeName(folder: string, name: string): string {
  let free = name;
  for (let copy = 2; exists(join(folder, free)); copy++) free = `${name}.${copy}`;
  return free;
}

export function exists(path: string): boolean {
  return lstatSync(path, { throwIfNoEntry: false }) !== undefined;
}
