import type { Conjunction } from '../tables/conjunction.js';
import { writeConjunctionsCsv } from '../tables/conjunctions-csv.js';
import { writeSensitivityCsv } from '../tables/sensitivity-csv.js';
import type { RankedConjunctions } from '../tables/terminal-table.js';
import { conjunctionOf, sensitivityOf } from './conjunctions.js';
import type { EncounterRecords } from './encounter-records.js';
import type { OutputFolder } from './output-folder.js';
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

/** Writes `conjunctions.csv` and `sensitivity.csv`. */
export async function writeRankedTables(folder: OutputFolder, ranked: RankedRecords): Promise<void> {
  const { records, objects, order, count, at } = ranked;
  await writeConjunctionsCsv(folder.stream('conjunctions.csv'), sequence(count, at));
  await writeSensitivityCsv(
    folder.stream('sensitivity.csv'),
    sequence(count, (index) => sensitivityOf(records, order[index], index + 1, objects)),
  );
}

function* sequence<T>(count: number, at: (index: number) => T): Generator<T> {
  for (let index = 0; index < count; index++) yield at(index);
}
