import { CAUTION } from '../caution.js';
import type { FileCount } from '../elements/element-set.js';
import { formatUtc } from '../elements/utc.js';
import type { ScreeningVolume } from '../encounters/volume.js';
import type { ChangedSetting } from './changed-settings.js';
import type { RunFile } from './run-folder.js';
import type { ScreenOptions } from './screen-options.js';

/** What `run.json` says of one group of element sets. */
export type ElementAges = {
  readonly objects: number;
  /** At the start of the window, days; `null` where there are no objects. */
  readonly medianDays: number | null;
  readonly worstDays: number | null;
  /** Catalog number of the object with the oldest set. */
  readonly worstDesignator: string | null;
};

/**
 * The contents of `run.json`: what was asked, of which input, with what outcome. The same input and options
 * give the same record, except for `environment` and the hashes of conjunction messages, which carry the time at
 * which they were made.
 */
export type RunRecord = {
  readonly command: string;
  /** As the job took them, defaults filled in, named as on the command line. */
  readonly options: Readonly<Record<string, unknown>>;
  readonly window: { readonly startUtc: string; readonly endUtc: string; readonly days: number };
  /** Every file that was read: size of the input, and what became of it. */
  readonly inputs: {
    readonly elements: readonly FileCount[];
    /** Files without element sets, such as `--objects`. */
    readonly others: readonly { readonly file: string; readonly sha256: string }[];
  };
  readonly elementAges: { readonly fleet: ElementAges | null; readonly catalog: ElementAges };
  /** The bounds within which no encounter can be missed, and the grid they were searched on. */
  readonly search: Readonly<Record<string, number | string | boolean | null>>;
  /** Where the position errors come from, such as the built-in table or a file. */
  readonly sigmaSource: string;
  /** Totals of the run, such as pairs, encounters and messages. */
  readonly counts: Readonly<Record<string, number>>;
  /** The highest collision probability, and whether it reaches `--alert-pc`. */
  readonly alert: { readonly highestProbability: number | null; readonly reached: boolean };
  /** The run of the history that this one was compared with. */
  readonly comparedWith: string | null;
  /** In which settings the two differ; `null` where there is no such run, or its settings are not known. */
  readonly settingsChanged: readonly ChangedSetting[] | null;
  /** Whatever differs from run to run and from machine to machine. */
  readonly environment: RunEnvironment;
};

type RunEnvironment = {
  readonly startedUtc: string;
  readonly finishedUtc: string;
  /** Seconds by stage. */
  readonly timingsS: Readonly<Record<string, number>>;
  readonly peakMemoryMB: number;
  readonly node: string;
  readonly platform: string;
  readonly workers: number;
};

/**
 * The text of `run.json`. The list of files at its end is what makes a folder a run of this program, and
 * lets a reader check that it is whole.
 */
export function runRecordText(
  version: string,
  record: RunRecord,
  files: readonly RunFile[],
  caution: string = CAUTION,
): string {
  const { environment, ...facts } = record;
  return `${JSON.stringify({ program: 'wideberth', version, caution, ...facts, files, environment }, null, 2)}\n`;
}

/** Options for `run.json`, named as on the command line; the number of workers changes no result and stays out. */
export function recordedOptions(options: ScreenOptions): Readonly<Record<string, unknown>> {
  const { volume } = options;
  return {
    fleet: options.fleetPaths,
    catalog: options.catalogPaths,
    'all-on-all': options.allOnAll,
    'within-fleet': options.withinFleet,
    start: formatUtc(options.startMs),
    days: options.days,
    ...recordedVolume(volume),
    objects: options.objectsPath ?? null,
    sigma: options.sigmaPath ?? null,
    'max-age-days': options.maxAgeDays,
    out: options.outPath,
    history: options.historyPath ?? null,
    'keep-runs': options.keepRuns ?? null,
    'alert-pc': options.alertPc ?? null,
    'cdm-from-pc': options.cdmFromPc ?? null,
    top: options.top,
  };
}

/** The options that make a volume. */
export function recordedVolume(volume: ScreeningVolume): Readonly<Record<string, unknown>> {
  return volume.shape === 'SPHERE'
    ? { 'miss-km': volume.missKm }
    : { 'volume-rtn-km': volume.halfSizeRtnKm, 'volume-shape': volume.shape };
}

/** Facts of this process, at the end of a job. */
export function environmentOf(
  startedMs: number,
  finishedMs: number,
  timingsS: Readonly<Record<string, number>>,
  workers: number,
): RunEnvironment {
  return {
    startedUtc: new Date(startedMs).toISOString(),
    finishedUtc: new Date(finishedMs).toISOString(),
    timingsS,
    // resourceUsage tells it in kilobytes, the most that the process and its threads ever held.
    peakMemoryMB: Math.round(process.resourceUsage().maxRSS / 1024),
    node: process.version,
    platform: `${process.platform}-${process.arch}`,
    workers,
  };
}

/** Median and worst of some ages. */
export function elementAgesOf(
  ages: readonly { readonly designator: string; readonly ageDays: number }[],
): ElementAges {
  if (ages.length === 0) return { objects: 0, medianDays: null, worstDays: null, worstDesignator: null };
  const sorted = [...ages].sort((a, b) => a.ageDays - b.ageDays);
  const middle = (sorted.length - 1) / 2;
  const worst = sorted[sorted.length - 1];
  return {
    objects: sorted.length,
    medianDays: (sorted[Math.floor(middle)].ageDays + sorted[Math.ceil(middle)].ageDays) / 2,
    worstDays: worst.ageDays,
    worstDesignator: worst.designator,
  };
}
