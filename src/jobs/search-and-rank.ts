import type { UnusedElements } from '../elements/element-set.js';
import { failedSets } from './failed-sets.js';
import { fillPairProbabilities } from './pair-probabilities.js';
import { type RankedRecords, rankedRecords } from './ranked-records.js';
import type { ScreenedObject } from './screened-object.js';
import type { SearchOutcome, SearchWorkers } from './search-in-workers.js';
import type { SearchPlan } from './search-plan.js';
import type { Timings } from './timings.js';

/** From when to when is screened, milliseconds of UTC since 1970-01-01. */
export type Window = { readonly startMs: number; readonly endMs: number };

export type RankedSearch = {
  readonly outcome: SearchOutcome;
  readonly ranked: RankedRecords;
  /** Sets that SGP4 gave up on within the window, as rows of `unused-elements.csv`. */
  readonly failed: readonly UnusedElements[];
};

/**
 * Does a search that was planned, and ranks what it finds.
 *
 * @param objects those of the plan
 * @param identities which object each index stands for, where several stand for one in turn
 */
export async function searchAndRank(
  plan: SearchPlan,
  objects: readonly ScreenedObject[],
  { startMs, endMs }: Window,
  workers: SearchWorkers,
  timings: Timings,
  identities?: ArrayLike<number>,
): Promise<RankedSearch> {
  const outcome = await workers.search(plan);
  timings.end('searching');
  fillPairProbabilities(outcome.records, objects.length, identities);
  return {
    outcome,
    ranked: rankedRecords(outcome.records, objects),
    failed: failedSets(outcome, objects, startMs, endMs),
  };
}
