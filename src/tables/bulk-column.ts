import { type CsvBytes, putComma, putRecordEnd } from './csv-bytes.js';
import type { CsvColumn } from './csv-text.js';

/** A column whose cells are also put straight into bytes, for tables with very many rows. */
export type BulkColumn<Row> = CsvColumn<Row> & {
  /** Puts what `cell` gives. */
  readonly put: (out: CsvBytes, row: Row, number: number) => void;
};

const oneCell: CsvBytes = { bytes: new Uint8Array(256), length: 0 };

/** The column whose cells `put` makes, one for tables of either kind. */
export function bulkColumn<Row>({
  name,
  unit,
  meaning,
  put,
}: Omit<BulkColumn<Row>, 'cell'>): BulkColumn<Row> {
  return {
    name,
    unit,
    meaning,
    put,
    cell: (row, number) => {
      oneCell.length = 0;
      put(oneCell, row, number);
      return Buffer.from(oneCell.bytes.buffer, 0, oneCell.length).toString();
    },
  };
}

/** Puts one record with its CRLF. */
export function putRow<Row>(
  out: CsvBytes,
  columns: readonly BulkColumn<Row>[],
  row: Row,
  number: number,
): void {
  for (let i = 0; i < columns.length; i++) {
    if (i > 0) putComma(out);
    columns[i].put(out, row, number);
  }
  putRecordEnd(out);
}
