import type { CompanionPair } from '../tables/companions-csv.js';
import {
  type ChangedSetting,
  changedSettings,
  changedSettingsTexts,
  type RunSettings,
  settingsOf,
} from './changed-settings.js';
import { type Comparison, compareWithPast, type PastRun, type SeenEncounter } from './changes.js';
import { FIELD, FIELDS } from './encounter-records.js';
import { prepareHistory, readPastRuns, readRecord } from './history.js';
import type { RankedRecords } from './ranked-records.js';
import type { RunRecord } from './run-record.js';
import type { JobPorts } from './screen-options.js';
import type { ScreenedObject } from './screened-object.js';
import type { Window } from './search-and-rank.js';

/** The runs of the history that a run is compared with. */
export type History = {
  /** The latest first. */
  readonly past: readonly PastRun[];
  /** Settings of the latest; `undefined` where they are not known. */
  readonly settings: RunSettings | undefined;
};

/**
 * Makes sure that the history can be written, and reads it.
 *
 * @param path `undefined` where there is none
 * @throws InputError when the history cannot be used
 */
export async function openHistory(
  path: string | undefined,
  startMs: number,
  ports: JobPorts,
): Promise<History> {
  if (path === undefined) return { past: [], settings: undefined };
  await prepareHistory(path, ports);
  const past = readPastRuns(path, startMs, ports);
  return { past, settings: past.length === 0 ? undefined : settingsOf(readRecord(path, past[0].name)) };
}

/**
 * In which settings a run differs from the latest before it, said in the log while it can still be stopped:
 * what is new or gone then may come from these alone.
 *
 * @param record version, options and files of the run, as `run.json` tells them
 * @returns `undefined` where there is no run before, or its settings are not known
 */
export function changedSince(
  { past, settings }: History,
  record: Pick<RunRecord, 'options' | 'inputs'> & { readonly version: string },
  ports: Pick<JobPorts, 'log'>,
): readonly ChangedSetting[] | undefined {
  if (past.length === 0) return undefined;
  const { name } = past[0];
  if (settings === undefined) {
    ports.log.warn(
      `the settings of run ${name} of the history cannot be read from its run.json: what changes.csv tells may come from other settings alone`,
    );
    return undefined;
  }
  const changed = changedSettings(settings, settingsOf(record) as RunSettings);
  if (changed.length > 0) {
    ports.log.warn(
      `run ${name}, which this one is compared with, had other settings: ${changedSettingsTexts(changed).join('; ')}; what changes.csv tells may come from these alone`,
    );
  }
  return changed;
}

/** Which objects a run screened against which. */
export type ScreenedPairs = {
  readonly primaries: readonly ScreenedObject[];
  readonly others: readonly ScreenedObject[];
  readonly withinPrimaries: boolean;
  /** Pairs that fly together, which have no encounters. */
  readonly companions: readonly CompanionPair[];
};

/**
 * Compares what a run found with the runs before it.
 *
 * @param past the latest first
 */
export function compareWithHistory(
  ranked: RankedRecords,
  past: readonly PastRun[],
  window: Window,
  pairs: ScreenedPairs,
): Comparison {
  return compareWithPast(seenEncounters(ranked), past, { ...window, isScreened: screenedTest(pairs) });
}

function seenEncounters({ records: { data }, order, objects }: RankedRecords): SeenEncounter[] {
  return Array.from(order, (number) => {
    const at = FIELDS * number;
    const first = objects[data[at + FIELD.first]];
    const second = objects[data[at + FIELD.second]];
    const probability = data[at + FIELD.probability];
    return {
      object1Designator: first.designator,
      object1Name: first.name,
      object2Designator: second.designator,
      object2Name: second.name,
      tcaMs: data[at + FIELD.tcaMs],
      missDistanceM: 1000 * data[at + FIELD.missKm],
      collisionProbability: Number.isNaN(probability) ? undefined : probability,
      shorterPeriodS: Math.min(first.orbit.periodS, second.orbit.periodS),
    };
  });
}

/** Whether two objects were screened against each other tonight; companions were not. */
function screenedTest({
  primaries,
  others,
  withinPrimaries,
  companions,
}: ScreenedPairs): (designatorA: string, designatorB: string) => boolean {
  const own = new Set(primaries.map(({ designator }) => designator));
  const rest = new Set(others.map(({ designator }) => designator));
  const together = new Set(
    companions.flatMap(({ object1: { designator: a }, object2: { designator: b } }) => [
      `${a} ${b}`,
      `${b} ${a}`,
    ]),
  );
  return (a, b) =>
    !together.has(`${a} ${b}`) &&
    ((own.has(a) && rest.has(b)) ||
      (own.has(b) && rest.has(a)) ||
      (withinPrimaries && own.has(a) && own.has(b)));
}
