import { type CsvColumn, textCell } from '../../tables/csv-text.js';
import { CAUTION_COLUMN } from '../../tables/shared-columns.js';
import type { FileTally } from './history-counts.js';

export const INPUT_COLUMNS: readonly CsvColumn<FileTally>[] = [
  { name: 'file', unit: '', meaning: 'Input file', cell: (row) => textCell(row.file) },
  count('read', 'Sets in the file: the sum of the columns that follow'),
  count('paired', 'Sets in at least one pair'),
  count('unpaired', 'Sound sets without a partner in any age window, or parted from it'),
  count('copies', 'Sets that also stand elsewhere in the history'),
  count('superseded', 'Sets with object and epoch of another one but other elements'),
  count('rejected', 'Faulty sets'),
  CAUTION_COLUMN,
];

function count(name: Exclude<keyof FileTally, 'file'>, meaning: string): CsvColumn<FileTally> {
  return { name, unit: '', meaning, cell: (row) => String(row[name]) };
}
