import type { Conjunction } from '../tables/conjunction.js';
import type { RankedConjunctions } from '../tables/terminal-table.js';
import { conjunctionOf } from './conjunctions.js';
import type { EncounterRecords } from './encounter-records.js';
import { rankRecords } from './rank-records.js';
import type { ScreenedObject } from './screened-object.js';

export type RankedRecords = RankedConjunctions & {
  readonly records: EncounterRecords;
  readonly objects: readonly ScreenedObject[];
  /** Record numbers from the first rank to the last. */
  readonly order: Uint32Array;
};

/** Puts encounters in the order of the tables; rows are made only where they are asked for. */
export function rankedRecords(records: EncounterRecords, objects: readonly ScreenedObject[]): RankedRecords {
  const order = rankRecords(records, objects);
  return {
    records,
    objects,
    order,
    count: order.length,
    at: (index): Conjunction => conjunctionOf(records, order[index], objects),
  };
}
