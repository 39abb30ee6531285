import type { CompanionPair } from '../tables/companions-csv.js';
import { type Comparison, compareWithPast, type PastRun, type SeenEncounter } from './changes.js';
import { FIELD, FIELDS } from './encounter-records.js';
import type { RankedRecords } from './ranked-records.js';
import type { ScreenedObject } from './screened-object.js';
import type { Window } from './search-and-rank.js';

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
