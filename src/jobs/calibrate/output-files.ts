import {
  closeSync,
  createWriteStream,
  existsSync,
  fsyncSync,
  mkdtempSync,
  openSync,
  renameSync,
  rmSync,
  statSync,
  type WriteStream,
} from 'node:fs';
import { basename, dirname, join, resolve } from 'node:path';
import { InputError } from '../../input-error.js';
import type { JobPorts } from '../screen-options.js';

/** The results of a calibration, the table first; the others stand beside it under the name of the table. */
export const OUTPUT_SUFFIXES = {
  table: '.csv',
  report: '.report.txt',
  bins: '.bins.csv',
  maneuvers: '.maneuvers.csv',
  inputs: '.inputs.csv',
  unused: '.unused.csv',
} as const;

export type OutputName = keyof typeof OUTPUT_SUFFIXES;

export type OutputFiles = {
  /** Holds everything until `publish`, temporary files included. */
  readonly staging: string;
  /** Where a result is to be written before it is published. */
  readonly stagedPath: (name: OutputName) => string;
  readonly createStaged: (name: OutputName) => WriteStream;
  /** Where a result ends up, as the user named it. */
  readonly finalPath: (name: OutputName) => string;
  /** Moves the named results to their places, each in one step, the table last. */
  readonly publish: (names: readonly OutputName[]) => void;
  /** Removes whatever was not published; a second call does nothing. */
  readonly close: () => void;
};

/**
 * Makes a hidden folder beside the table, on the same file system: results can be moved into place in one
 * step, and there is as much room for temporary files as for results.
 *
 * @param out path of the table
 * @throws InputError when the place cannot hold files
 */
export function openOutputFiles(out: string, ports: Pick<JobPorts, 'onStop'>): OutputFiles {
  const folder = dirname(resolve(out));
  const stem = basename(out).replace(/\.csv$/i, '');
  if (stem === '' || /[/\\]$/.test(out)) throw new InputError(`--out ${out}: name a file, such as sigma.csv`);
  if (!existsSync(folder)) throw new InputError(`--out ${out}: its folder does not exist: create it first`);
  if (existsSync(out) && statSync(out).isDirectory()) {
    throw new InputError(`--out ${out} is a folder: name a file in it, such as ${join(out, 'sigma.csv')}`);
  }
  const staging = mkdtempSync(join(folder, `.${stem}.calibrate-`));
  const close = () => {
    forget();
    rmSync(staging, { recursive: true, force: true });
  };
  const forget = ports.onStop(close);
  const stagedPath = (name: OutputName) => join(staging, `result${OUTPUT_SUFFIXES[name]}`);
  const finalPath = (name: OutputName) =>
    name === 'table' ? out : join(dirname(out), stem + OUTPUT_SUFFIXES[name]);
  return {
    staging,
    stagedPath,
    createStaged: (name) => createWriteStream(stagedPath(name), { flags: 'wx' }),
    finalPath,
    publish: (names) => {
      for (const name of names) syncFile(stagedPath(name));
      for (const name of [...names].sort((a, b) => Number(a === 'table') - Number(b === 'table'))) {
        renameSync(stagedPath(name), finalPath(name));
      }
      syncFile(folder);
    },
    close,
  };
}

/** A name must not point to bytes that a power cut can still lose. */
function syncFile(path: string): void {
  const handle = openSync(path, 'r');
  try {
    fsyncSync(handle);
  } finally {
    closeSync(handle);
  }
}
