import type { ScreeningVolume } from '../encounters/volume.js';
import type { Log } from './log.js';

/** The longest window that can be screened, days. */
export const LONGEST_WINDOW_DAYS = 60;

/** What every screening depends on, that of a launch too; checked and complete, paths as the process can open them (`-`: standard input). */
export type SharedOptions = {
  /** Element-set files of the fleet. */
  readonly fleetPaths: readonly string[];
  /** Element-set files of everything else. */
  readonly catalogPaths: readonly string[];
  /** Length of the window. */
  readonly days: number;
  readonly volume: ScreeningVolume;
  readonly objectsPath: string | undefined;
  readonly sigmaPath: string | undefined;
  /** Element sets older than this at the start of the window are not trusted. */
  readonly maxAgeDays: number;
  readonly workers: number;
  readonly outPath: string;
  /** Encounters of this collision probability or more get a conjunction message. */
  readonly cdmFromPc: number | undefined;
  /** Rows of the ranked table on standard output. */
  readonly top: number;
};

/** Everything the nightly screening depends on. `fleetPaths` is empty exactly with `allOnAll`; `catalogPaths` may be empty with `withinFleet`. */
export type ScreenOptions = SharedOptions & {
  /** Every object of the catalog against every other. */
  readonly allOnAll: boolean;
  /** Also the members of the fleet against each other. */
  readonly withinFleet: boolean;
  /** Start of the window, milliseconds of UTC since 1970-01-01. */
  readonly startMs: number;
  readonly historyPath: string | undefined;
  /** Past runs to keep in the history; `undefined` deletes nothing. */
  readonly keepRuns: number | undefined;
  /** An encounter of this collision probability or more makes the command end with status 3. */
  readonly alertPc: number | undefined;
};

/** How far a job is, for someone who waits. */
export type Progress = {
  /** What is being done, one or two words. */
  readonly stage: string;
  /** From 0 to 1 within the stage. */
  readonly fraction: number;
  /** What has come of it so far, such as objects, simulated days and encounters. */
  readonly detail: string;
};

/** The outside world of a job, so that tests can put their own in its place. */
export type JobPorts = {
  readonly log: Log;
  /** Tells how far the job is. */
  readonly progress: (progress: Progress) => void;
  /** Registers what must be undone if the process is asked to stop; the returned function takes it back. */
  readonly onStop: (undo: () => void) => () => void;
  /** Wall clock, milliseconds since 1970-01-01; for `run.json` and the lock only, never for results. */
  readonly nowMs: () => number;
  readonly version: string;
};

export type ScreenOutcome = {
  /** What goes to standard output. */
  readonly lines: readonly string[];
  /** At least one encounter reaches `alertPc`. */
  readonly alertReached: boolean;
};
