import { CONJUNCTION_COLUMNS } from '../tables/conjunctions-csv.js';
import { type CsvColumn, csvRow } from '../tables/csv-text.js';
import { SENSITIVITY_COLUMNS } from '../tables/sensitivity-csv.js';
import { conjunctionOf, sensitivityOf } from './conjunctions.js';
import type { EncounterRecords } from './encounter-records.js';
import type { ShownObject } from './screened-object.js';

/** What the rows of the ranked tables are made from. */
export type TableSource = {
  readonly records: EncounterRecords;
  /** Record numbers from the first rank to the last. */
  readonly order: Uint32Array;
  readonly objects: readonly ShownObject[];
};

/** Rows of a table by index in the order of the ranks, `to` not included. */
export type RowRange = {
  readonly table: 'conjunctions' | 'sensitivity';
  readonly from: number;
  readonly to: number;
};

/** The records of a range of rows as they stand in the file. */
export function tableText({ records, order, objects }: TableSource, range: RowRange): string {
  return range.table === 'conjunctions'
    ? rowsText(CONJUNCTION_COLUMNS, range, (index) => conjunctionOf(records, order[index], objects))
    : rowsText(SENSITIVITY_COLUMNS, range, (index) =>
        sensitivityOf(records, order[index], index + 1, objects),
      );
}

function rowsText<Row>(
  columns: readonly CsvColumn<Row>[],
  { from, to }: RowRange,
  rowAt: (index: number) => Row,
): string {
  let text = '';
  for (let index = from; index < to; index++) text += csvRow(columns, rowAt(index), index + 1);
  return text;
}
