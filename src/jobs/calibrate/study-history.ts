import { AGE_KNOTS_DAYS } from '../../uncertainty/calibrate-age-knots.js';
import { addToClass, type ClassBins, emptyClassBins } from './class-bins.js';
import { addToCoverage, type Coverage, emptyCoverage } from './coverage.js';
import { reaches } from './error-growth.js';
import type { HeldBackDifferences } from './held-back-differences.js';
import type { FileTally } from './history-counts.js';
import type { ManeuverRow } from './maneuvers-csv.js';
import { type ObjectHistory, objectHistories } from './object-histories.js';
import { type ObjectResult, type ObjectWork, workOnObject } from './object-result.js';
import { ORBIT_CLASSES } from './orbit-classes.js';
import { pairAgeDays } from './pairs.js';
import { PARTITION_COUNT, readPartition } from './partitions.js';
import type { PairCounts } from './report.js';
import { fileAt, lineAt, type SetRecords } from './set-records.js';
import type { UnusedSets } from './unused-sets.js';

/** What all objects together showed. */
export type HistoryStudy = {
  /** By designator. */
  readonly objects: readonly ObjectResult[];
  readonly classBins: ClassBins;
  /** Of the objects with a growth law of their own. */
  readonly ownCoverage: Coverage;
  readonly pairs: PairCounts;
  /** By object and time. */
  readonly maneuvers: readonly ManeuverRow[];
  readonly objectsWithManeuvers: number;
  /** Held-back differences that no row can be held against, whatever the classes turn out to be. */
  readonly uncheckedHeldBack: number;
  readonly epochsMs: { readonly first: number; readonly last: number } | undefined;
};

type Sinks = {
  /** By file; the counts that only show here are added to. */
  readonly tallies: readonly FileTally[];
  readonly unused: UnusedSets;
  /** Gets all held-back differences. */
  readonly heldBack: HeldBackDifferences;
};

/**
 * Works through the partitions in `folder`, one at a time and object by object. Memory: the sets of one
 * partition, the differences of one object, the statistics (not the samples) of all objects and classes.
 */
export async function studyHistory(
  folder: string,
  sinks: Sinks,
  progress: (fraction: number, objects: number, maneuvers: number) => void,
): Promise<HistoryStudy> {
  const objects: ObjectResult[] = [];
  const maneuvers: ManeuverRow[] = [];
  const classBins = emptyClassBins(ORBIT_CLASSES.length);
  const ownCoverage = emptyCoverage();
  const pairs = { fitted: 0, heldBack: 0, acrossManeuver: 0, intoHeldBack: 0, failed: 0 };
  let objectsWithManeuvers = 0;
  let uncheckedHeldBack = 0;
  let first = Number.POSITIVE_INFINITY;
  let last = Number.NEGATIVE_INFINITY;

  for (let partition = 0; partition < PARTITION_COUNT; partition++) {
    const records = await readPartition(folder, partition);
    for (const history of objectHistories(records)) {
      const work = workOnObject(records, history.designator, history.sets);
      const { differences } = work;
      tallySets(records, history, work, sinks);
      if (differences.sets.length === 0) continue;
      objects.push(work.result);
      first = Math.min(first, differences.epochMs[0]);
      last = Math.max(last, differences.epochMs.at(-1)!);
      if (work.maneuvers.length > 0) objectsWithManeuvers++;
      for (const { before, ...sizes } of work.maneuvers) {
        maneuvers.push({
          designator: history.designator,
          lastEpochBeforeMs: differences.epochMs[before],
          firstEpochAfterMs: differences.epochMs[before + 1],
          ...sizes,
        });
      }
      countPairs(pairs, work);
      addFittedToClasses(classBins, work);
      uncheckedHeldBack += passHeldBack(work, ownCoverage, sinks);
    }
    progress((partition + 1) / PARTITION_COUNT, objects.length, maneuvers.length);
  }
  return {
    objects: objects.sort((a, b) => a.designator - b.designator),
    classBins,
    ownCoverage,
    pairs,
    maneuvers: maneuvers.sort(
      (a, b) => a.designator - b.designator || a.lastEpochBeforeMs - b.lastEpochBeforeMs,
    ),
    objectsWithManeuvers,
    uncheckedHeldBack,
    epochsMs: first <= last ? { first, last } : undefined,
  };
}

function tallySets(records: SetRecords, history: ObjectHistory, work: ObjectWork, sinks: Sinks): void {
  const { tallies, unused } = sinks;
  const tallyOf = (set: number) => tallies[fileAt(records, set)];
  const listed = (set: number) => ({
    source: { file: tallyOf(set).file, line: lineAt(records, set), text: '' },
    designator: String(history.designator),
  });
  for (const set of history.copies) tallyOf(set).copies++;
  for (const { set, by } of history.superseded) {
    tallyOf(set).superseded++;
    const detail = `same epoch as the set in ${tallyOf(by).file}, line ${lineAt(records, by)}, other elements: that one is used`;
    unused.add({ ...listed(set), reason: 'superseded', detail });
  }
  for (const set of work.differences.rejected) {
    tallyOf(set).rejected++;
    unused.add({ ...listed(set), reason: 'rejected', detail: 'SGP4 gives no state at the epoch' });
  }
  for (const [position, set] of work.differences.sets.entries()) {
    if (work.pairs.isPaired[position] === 1) tallyOf(set).paired++;
    else tallyOf(set).unpaired++;
  }
}

function countPairs(counts: { -readonly [K in keyof PairCounts]: number }, work: ObjectWork): void {
  const count = (byKnot: ReadonlyArray<readonly number[]>) =>
    byKnot.reduce((sum, olders) => sum + olders.length, 0);
  counts.fitted += count(work.pairs.fitted);
  counts.heldBack += count(work.pairs.heldBack);
  counts.acrossManeuver += work.pairs.acrossManeuver;
  counts.intoHeldBack += work.pairs.intoHeldBack;
  counts.failed += work.differences.failedPairs;
}

/** An orbit may pass from class to class: each pair belongs to the class of its older set. */
function addFittedToClasses(classBins: ClassBins, work: ObjectWork): void {
  const { differences, pairs } = work;
  for (let knot = 0; knot < AGE_KNOTS_DAYS.length; knot++) {
    const byClass = new Map<number, number[]>();
    for (const older of pairs.fitted[knot]) {
      const orbitClass = differences.orbitClasses[older];
      const olders = byClass.get(orbitClass);
      if (olders === undefined) byClass.set(orbitClass, [older]);
      else olders.push(older);
    }
    for (const [orbitClass, olders] of byClass) {
      if (orbitClass >= 0) addToClass(classBins, orbitClass, differences, olders, knot);
    }
  }
}

/** @returns how many no law can be held against: neither that of the object nor that of a class */
function passHeldBack(work: ObjectWork, ownCoverage: Coverage, sinks: Sinks): number {
  const { result, differences, pairs } = work;
  const hasOwnRows = result.growth !== undefined;
  let unchecked = 0;
  for (let knot = 0; knot < AGE_KNOTS_DAYS.length; knot++) {
    for (const older of pairs.heldBack[knot]) {
      const at = (older * AGE_KNOTS_DAYS.length + knot) * 3;
      const differenceRtnM = differences.rtnM.subarray(at, at + 3);
      const ageDays = pairAgeDays(differences, older, knot);
      const orbitClass = differences.orbitClasses[older];
      if (orbitClass >= 0) sinks.heldBack.add({ hasOwnRows, orbitClass, knot, ageDays, differenceRtnM });
      if (result.growth !== undefined && reaches(result.growth, knot)) {
        addToCoverage(ownCoverage, result.growth, knot, ageDays, differenceRtnM);
      } else if (hasOwnRows || orbitClass < 0) {
        unchecked++;
      }
    }
  }
  return unchecked;
}
