import { putRow } from '../tables/bulk-column.js';
import { CONJUNCTION_COLUMNS } from '../tables/conjunctions-csv.js';
import type { CsvBytes } from '../tables/csv-bytes.js';
import { SENSITIVITY_COLUMNS } from '../tables/sensitivity-csv.js';
import { conjunctionRowOf, type RowObject, sensitivityOf } from './conjunctions.js';
import type { EncounterRecords } from './encounter-records.js';

/** What the rows of the ranked tables are made from. */
export type RankedSource = {
  readonly records: EncounterRecords;
  /** Record numbers from the first rank to the last. */
  readonly order: Uint32Array;
  readonly objects: readonly RowObject[];
};

/** Rows by index in the order of the ranks, `to` not included. */
export type RowRange = { readonly from: number; readonly to: number };

/** Rows of the ranked tables as they stand in the files, UTF-8. */
export type RankedText = { readonly conjunctions: Uint8Array; readonly sensitivity: Uint8Array };

/** What to make, and earlier text that nobody needs any more, in whose memory it is made. */
export type RankedQuestion = RowRange & { readonly spent: RankedText };

const EMPTY = new Uint8Array(0);

/** No text, and no memory for any: what is made in its place takes what it needs. */
export const NO_TEXT: RankedText = { conjunctions: EMPTY, sensitivity: EMPTY };

/** The same range of rows of both tables. */
export function rankedText(
  { records, order, objects }: RankedSource,
  { from, to, spent }: RankedQuestion,
): RankedText {
  const conjunctions = startIn(spent.conjunctions);
  const sensitivity = startIn(spent.sensitivity);
  for (let index = from; index < to; index++) {
    const number = order[index];
    const rank = index + 1;
    putRow(conjunctions, CONJUNCTION_COLUMNS, conjunctionRowOf(records, number, objects), rank);
    putRow(sensitivity, SENSITIVITY_COLUMNS, sensitivityOf(records, number, rank, objects), rank);
  }
  return { conjunctions: finished(conjunctions), sensitivity: finished(sensitivity) };
}

function startIn({ buffer }: Uint8Array): CsvBytes {
  return { bytes: new Uint8Array(buffer), length: 0 };
}

function finished({ bytes, length }: CsvBytes): Uint8Array {
  return bytes.subarray(0, length);
}
