import { constants, copyFileSync, mkdirSync, readdirSync, readFileSync, renameSync, rmSync } from 'node:fs';
import { dirname, join } from 'node:path';
import { formatUtc, parseUtc } from '../elements/utc.js';
import { InputError } from '../input-error.js';
import type { KnownEncounter, PastRun } from './changes.js';
import { onFiles } from './file-errors.js';
import {
  exists,
  filesOfRun,
  foreignEntries,
  openRunFile,
  RUN_RECORD,
  syncFile,
  syncFolder,
  syncFolders,
} from './run-folder.js';
import { type RunLock, takeLock } from './run-lock.js';
import { type JobPorts, LONGEST_WINDOW_DAYS } from './screen-options.js';

const MS_PER_DAY = 86_400_000;
/** What a run hands on to the runs after it; beside the files of the run in its folder of the history. */
const ENCOUNTERS = 'encounters.json';
const ENCOUNTERS_FORMAT = 1;
const LOCK = '.history.lock';
const STAGING = '.history.partial';
const REMOVING = '.history.removing';
const LOCK_WAIT_MS = 60_000;
const RUN_NAME = /^(\d{4}-\d{2}-\d{2})T(\d{2})-(\d{2})-(\d{2})Z-(\d{4,})$/;

type RunName = { readonly name: string; readonly startMs: number; readonly sequence: number };

/**
 * Makes the folder of a history, if it is not there, and finds out before a long job whether it can be
 * written.
 *
 * @throws InputError when it cannot
 */
export async function prepareHistory(history: string, ports: JobPorts): Promise<void> {
  const lock = await lockHistory(history, ports);
  try {
    onFiles(history, () => removeLeftovers(history, ports));
  } finally {
    lock.release();
  }
}

/**
 * Reads the latest run of a history and those before it that can have encounters in common with a window
 * that starts at `startMs`, the latest first. Runs count by the start of their window and then by their number, never by the times
 * that a file system shows or a clock told; runs of later windows are left out.
 *
 * A folder that cannot be read is told in the log and left out.
 *
 * @throws InputError when the history itself cannot be read
 */
export function readPastRuns(history: string, startMs: number, ports: Pick<JobPorts, 'log'>): PastRun[] {
  if (!exists(history)) return [];
  return runNames(history, ports)
    .filter((run) => run.startMs <= startMs)
    .sort((a, b) => b.startMs - a.startMs || b.sequence - a.sequence)
    .filter((run, i) => i === 0 || run.startMs >= startMs - LONGEST_WINDOW_DAYS * MS_PER_DAY)
    .flatMap(({ name, startMs: runStartMs }) => {
      try {
        return [{ name, startMs: runStartMs, encounters: readEncounters(join(history, name, ENCOUNTERS)) }];
      } catch (error) {
        ports.log.warn(`${join(history, name)} is not compared with: ${(error as Error).message}`);
        return [];
      }
    });
}

/** The record of a run in the history, as it was parsed; `undefined` where it cannot be read. */
export function readRecord(history: string, name: string): unknown {
  try {
    return JSON.parse(readFileSync(join(history, name, RUN_RECORD), 'utf8'));
  } catch {
    return undefined;
  }
}

/**
 * Puts a copy of a published run into the history, in one step, and removes the oldest runs beyond `keepRuns`.
 *
 * The new folder is named by the start of the window and the next free number: unique, in order, and the
 * same whatever the clock says. The lock of the history is held meanwhile, for runs with different outputs
 * may share one history. A run that is published but killed before it is in the history is as good as not
 * run for the comparisons after it: they go back to the runs before.
 *
 * @param run folder and file names of the run, its record among them
 * @param keepRuns how many runs stay, this one included; `undefined` removes nothing
 * @returns the name of the folder in the history
 * @throws InputError when the history cannot be written; RunLockedError when another run holds it for long.
 */
export async function keepInHistory(
  history: string,
  startMs: number,
  run: { readonly folder: string; readonly files: readonly string[] },
  encounters: readonly KnownEncounter[],
  keepRuns: number | undefined,
  ports: JobPorts,
): Promise<string> {
  const lock = await lockHistory(history, ports);
  const staging = join(history, STAGING);
  const clear = (): void => {
    rmSync(staging, { recursive: true, force: true });
    lock.release();
  };
  const forget = ports.onStop(clear);
  try {
    return onFiles(history, () => {
      removeLeftovers(history, ports);
      mkdirSync(staging);
      for (const name of run.files) {
        const copy = join(staging, name);
        mkdirSync(dirname(copy), { recursive: true });
        copyFileSync(join(run.folder, name), copy, constants.COPYFILE_FICLONE);
        syncFile(copy);
      }
      const file = openRunFile(staging, ENCOUNTERS);
      try {
        file.append(encountersText(encounters));
        file.finish();
      } finally {
        file.abandon();
      }
      syncFolders(staging);
      const name = nextName(history, startMs);
      renameSync(staging, join(history, name));
      syncFolder(history);
      if (keepRuns !== undefined) removeOldest(history, keepRuns, ports);
      return name;
    });
  } finally {
    forget();
    clear();
  }
}

async function lockHistory(history: string, ports: JobPorts): Promise<RunLock> {
  onFiles(history, () => mkdirSync(history, { recursive: true }));
  return takeLock(join(history, LOCK), `the history ${history}`, ports, LOCK_WAIT_MS);
}

/** Removes what a killed run left unfinished; called by the holder of the lock. */
function removeLeftovers(history: string, ports: Pick<JobPorts, 'log'>): void {
  for (const folder of [join(history, STAGING), join(history, REMOVING)].filter(exists)) {
    rmSync(folder, { recursive: true });
    ports.log.info(`removed ${folder}, left unfinished by an earlier run`);
  }
}

function runNames(history: string, ports: Pick<JobPorts, 'log'>): RunName[] {
  return onFiles(history, () => {
    const entries = readdirSync(history, { withFileTypes: true }).filter(
      (entry) => !entry.name.startsWith('.'),
    );
    const foreign: string[] = [];
    const runs = entries.flatMap((entry) => {
      const run = entry.isDirectory() ? runName(entry.name) : undefined;
      if (run === undefined) foreign.push(entry.name);
      return run ?? [];
    });
    if (foreign.length > 0) {
      const more = foreign.length === 1 ? '' : ` and ${foreign.length - 1} more`;
      ports.log.warn(`${join(history, foreign[0])}${more}: not a run of the history, left alone`);
    }
    return runs;
  });
}

function runName(name: string): RunName | undefined {
  const match = RUN_NAME.exec(name);
  if (match === null) return undefined;
  const startMs = parseUtc(`${match[1]}T${match[2]}:${match[3]}:${match[4]}Z`);
  return startMs === undefined ? undefined : { name, startMs, sequence: Number(match[5]) };
}

function nextName(history: string, startMs: number): string {
  const numbers = readdirSync(history).map((name) => runName(name)?.sequence ?? 0);
  const next = Math.max(0, ...numbers) + 1;
  const start = formatUtc(Math.floor(startMs / 1000) * 1000)
    .replace('.000Z', 'Z')
    .replaceAll(':', '-');
  return `${start}-${String(next).padStart(4, '0')}`;
}

/**
 * Removes the oldest runs beyond `keepRuns`. Only a folder that holds exactly what the history put there is
 * removed: one with something else in it stays whole, for someone has made it their own.
 */
function removeOldest(history: string, keepRuns: number, ports: Pick<JobPorts, 'log'>): void {
  const runs = runNames(history, { log: { ...ports.log, warn: () => {} } });
  const oldest = runs
    .sort((a, b) => a.startMs - b.startMs || a.sequence - b.sequence)
    .slice(0, Math.max(0, runs.length - keepRuns));
  for (const { name } of oldest) {
    const folder = join(history, name);
    const reason = reasonToKeep(folder);
    if (reason !== undefined) {
      ports.log.warn(`${folder} is older than the ${keepRuns} runs to keep, but stays: ${reason}`);
      continue;
    }
    try {
      // First out of the history in one step, then file by file: a run there is always a whole one.
      renameSync(folder, join(history, REMOVING));
      rmSync(join(history, REMOVING), { recursive: true });
      ports.log.info(`removed ${folder}, older than the ${keepRuns} runs to keep`);
    } catch (error) {
      ports.log.warn(`${folder} could not be removed: ${(error as Error).message}`);
      return;
    }
  }
}

function reasonToKeep(folder: string): string | undefined {
  const own = filesOfRun(folder);
  if (own === undefined) return `its ${RUN_RECORD} cannot be read`;
  const foreign = foreignEntries(folder, new Set([...own, ENCOUNTERS]));
  return foreign.length === 0 ? undefined : `${foreign[0]} in it is not of the run`;
}

function encountersText(encounters: readonly KnownEncounter[]): string {
  const lines = encounters.map((encounter) => `    ${JSON.stringify(encounter)}`);
  return `{\n  "format": ${ENCOUNTERS_FORMAT},\n  "encounters": [\n${lines.join(',\n')}\n  ]\n}\n`;
}

function readEncounters(path: string): KnownEncounter[] {
  const { format, encounters } = JSON.parse(readFileSync(path, 'utf8')) as {
    format?: unknown;
    encounters?: unknown;
  };
  if (format !== ENCOUNTERS_FORMAT || !Array.isArray(encounters)) {
    throw new InputError(`${ENCOUNTERS} is not of format ${ENCOUNTERS_FORMAT}`);
  }
  return encounters.map((encounter: unknown, i) => {
    if (!isKnownEncounter(encounter)) throw new InputError(`encounter ${i + 1} in ${ENCOUNTERS} is damaged`);
    return { ...encounter, collisionProbability: encounter.collisionProbability ?? undefined };
  });
}

function isKnownEncounter(value: unknown): value is KnownEncounter {
  const encounter = value as KnownEncounter | null;
  return (
    encounter !== null &&
    typeof encounter === 'object' &&
    [
      encounter.object1Designator,
      encounter.object1Name,
      encounter.object2Designator,
      encounter.object2Name,
    ].every((text) => typeof text === 'string') &&
    [
      encounter.tcaMs,
      encounter.missDistanceM,
      encounter.shorterPeriodS,
      encounter.firstSeenMs,
      encounter.runsSeen,
    ].every(Number.isFinite) &&
    (encounter.collisionProbability === undefined || Number.isFinite(encounter.collisionProbability))
  );
}
