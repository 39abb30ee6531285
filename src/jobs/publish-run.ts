import type { UnusedElements } from '../elements/element-set.js';
import { formatUtc } from '../elements/utc.js';
import { type CompanionPair, writeCompanionsCsv } from '../tables/companions-csv.js';
import { writeUnusedElementsCsv } from '../tables/unused-elements-csv.js';
import { FIELD, FIELDS } from './encounter-records.js';
import type { OutputFolder } from './output-folder.js';
import type { RankedRecords } from './ranked-records.js';
import { RUN_RECORD } from './run-folder.js';
import { environmentOf, type RunRecord, runRecordText } from './run-record.js';
import type { JobPorts, SharedOptions } from './screen-options.js';
import type { RankedSearch, Window } from './search-and-rank.js';
import { searchFacts } from './search-facts.js';
import type { Timings } from './timings.js';
import { writeMessages } from './write-messages.js';
import { writeRankedTables } from './write-ranked-tables.js';

/** What every run leaves of its encounters. */
export type RunResults = {
  readonly ranked: RankedRecords;
  readonly companions: readonly CompanionPair[];
  readonly unused: readonly UnusedElements[];
};

/**
 * Writes the files that every run has, the messages among them.
 *
 * @returns number of messages
 */
export async function writeResults(
  folder: OutputFolder,
  { ranked, companions, unused }: RunResults,
  { startMs, endMs }: Window,
  { volume, cdmFromPc, workers }: SharedOptions,
  ports: JobPorts,
): Promise<number> {
  await writeRankedTables(folder, ranked, workers, ports);
  await writeCompanionsCsv(folder.stream('companions.csv'), companions);
  await writeUnusedElementsCsv(folder.stream('unused-elements.csv'), unused);
  return writeMessages(folder, ranked, cdmFromPc, { startMs, endMs, volume }, ports);
}

/** What a run tells of itself beside its files. */
export type FinishedRun = {
  readonly options: SharedOptions;
  readonly alertPc: number | undefined;
  readonly window: Window;
  readonly search: RankedSearch;
  /** What `run.json` says and each command knows by itself. */
  readonly facts: Pick<
    RunRecord,
    | 'command'
    | 'options'
    | 'inputs'
    | 'elementAges'
    | 'sigmaSource'
    | 'counts'
    | 'comparedWith'
    | 'settingsChanged'
  >;
  readonly caution: string;
  readonly startedMs: number;
  readonly timings: Timings;
};

/**
 * Ends a run whose files are all written: its record last, then everything into the place of the run before.
 *
 * @returns the names of its files, and whether its highest probability reaches the alert
 */
export function publishRun(
  folder: OutputFolder,
  { options, alertPc, window, search, facts, caution, startedMs, timings }: FinishedRun,
  ports: JobPorts,
): { readonly files: readonly string[]; readonly alertReached: boolean } {
  const { order, records } = search.ranked;
  const highest = order.length === 0 ? Number.NaN : records.data[FIELDS * order[0] + FIELD.probability];
  const alertReached = alertPc !== undefined && highest >= alertPc;
  let names: readonly string[] = [];
  folder.seal((files) => {
    names = [...files.map((file) => file.name), RUN_RECORD];
    const record: RunRecord = {
      command: facts.command,
      options: facts.options,
      window: {
        startUtc: formatUtc(window.startMs),
        endUtc: formatUtc(window.endMs),
        days: options.days,
      },
      inputs: facts.inputs,
      elementAges: facts.elementAges,
      search: searchFacts(search.outcome, options.volume),
      sigmaSource: facts.sigmaSource,
      counts: facts.counts,
      alert: { highestProbability: Number.isNaN(highest) ? null : highest, reached: alertReached },
      comparedWith: facts.comparedWith,
      settingsChanged: facts.settingsChanged,
      environment: environmentOf(startedMs, ports.nowMs(), timings.seconds, options.workers),
    };
    return runRecordText(ports.version, record, files, caution);
  });
  folder.publish();
  return { files: names, alertReached };
}
