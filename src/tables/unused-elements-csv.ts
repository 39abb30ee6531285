import type { Writable } from 'node:stream';
import type { UnusedElements } from '../elements/element-set.js';
import { type CsvColumn, textCell, utcCell, writeCsv } from './csv-text.js';
import { CAUTION_COLUMN } from './shared-columns.js';

/** The columns of `unused-elements.csv`: every set that was read and not used, or not to the end. */
export const UNUSED_ELEMENTS_COLUMNS: readonly CsvColumn<UnusedElements>[] = [
  {
    name: 'file',
    unit: '',
    meaning: 'File that holds the set, as it was named, or standard input',
    cell: (row) => textCell(row.source.file === '-' ? 'standard input' : row.source.file),
  },
  {
    name: 'line',
    unit: '',
    meaning: 'First line of the set, from 1; in a format without lines, the number of the record',
    cell: (row) => String(row.source.line),
  },
  {
    name: 'designator',
    unit: '',
    meaning: 'Catalog number in decimal, empty if it could not be read',
    cell: (row) => textCell(row.designator),
  },
  {
    name: 'reason',
    unit: '',
    meaning:
      'rejected: faulty; superseded: another set of the object took its place; ' +
      'failed: used until the propagation gave up inside the window',
    cell: (row) => row.reason,
  },
  {
    name: 'failed_at_utc',
    unit: 'UTC',
    meaning: 'When the propagation gave up, ISO 8601 to the millisecond; empty for other reasons',
    cell: (row) => utcCell(row.failedAtMs),
  },
  {
    name: 'detail',
    unit: '',
    meaning: 'What is wrong with which value, or which set took its place',
    cell: (row) => textCell(row.detail),
  },
  {
    name: 'text',
    unit: '',
    meaning: 'The set as it stood in the file, with its line breaks',
    cell: (row) => textCell(row.source.text),
  },
  CAUTION_COLUMN,
];

/**
 * Writes `unused-elements.csv` to `output` and ends it, the sets in the order given.
 *
 * @returns the number of sets written
 * @throws what `output` throws
 */
export async function writeUnusedElementsCsv(
  output: Writable,
  sets: Iterable<UnusedElements> | AsyncIterable<UnusedElements>,
): Promise<number> {
  return writeCsv(output, UNUSED_ELEMENTS_COLUMNS, sets);
}
