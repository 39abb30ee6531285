import type { Writable } from 'node:stream';
import type { Vector3 } from '../vector.js';
import { type CsvColumn, fixedCell, textCell, utcCell, writeCsv } from './csv-text.js';
import { LAUNCH_CAUTION_COLUMN } from './shared-columns.js';

/** One element set of a launch batch: which object it is, and when it counts. Times in milliseconds of UTC since 1970-01-01. */
export type BatchObjectRow = {
  readonly designator: string;
  readonly name: string;
  readonly file: string;
  readonly line: number;
  /** `''` for none or zero. */
  readonly numberInFile: string;
  readonly epochMs: number;
  readonly releaseMs: number;
  readonly screenedFromMs: number;
  readonly screenedToMs: number;
  readonly sigmaFromRtnM: Vector3;
  readonly sigmaToRtnM: Vector3;
  readonly sigmaSource: string;
};

/** The columns of `batch-objects.csv`; new ones only ever follow the last one. */
export const BATCH_OBJECT_COLUMNS: readonly CsvColumn<BatchObjectRow>[] = [
  {
    name: 'designator',
    unit: '',
    meaning: 'Designator of the object in all tables of this run',
    cell: (row) => textCell(row.designator),
  },
  {
    name: 'name',
    unit: '',
    meaning: 'Its name, empty if the elements give none',
    cell: (row) => textCell(row.name),
  },
  {
    name: 'file',
    unit: '',
    meaning: 'File of the element set',
    cell: (row) => textCell(row.file),
  },
  {
    name: 'line',
    unit: '',
    meaning: 'First line of the set, in a format without lines the number of the record, from 1',
    cell: (row) => String(row.line),
  },
  {
    name: 'number_in_file',
    unit: '',
    meaning: 'Catalog number in the set, not used; empty for none or zero',
    cell: (row) => textCell(row.numberInFile),
  },
  {
    name: 'epoch_utc',
    unit: 'UTC',
    meaning: 'Epoch of the set, ISO 8601 to the millisecond',
    cell: (row) => utcCell(row.epochMs),
  },
  {
    name: 'release_utc',
    unit: 'UTC',
    meaning: 'When the object is released',
    cell: (row) => utcCell(row.releaseMs),
  },
  {
    name: 'screened_from_utc',
    unit: 'UTC',
    meaning: 'From when on the object is screened on this set',
    cell: (row) => utcCell(row.screenedFromMs),
  },
  {
    name: 'screened_until_utc',
    unit: 'UTC',
    meaning: 'Until when',
    cell: (row) => utcCell(row.screenedToMs),
  },
  ...sigmaColumns('from', (row) => row.sigmaFromRtnM),
  ...sigmaColumns('until', (row) => row.sigmaToRtnM),
  {
    name: 'sigma_source',
    unit: '',
    meaning: 'Where the sigmas come from: the injection errors of the batch, or file and line',
    cell: (row) => textCell(row.sigmaSource),
  },
  LAUNCH_CAUTION_COLUMN,
];

function sigmaColumns(
  when: 'from' | 'until',
  of: (row: BatchObjectRow) => Vector3,
): CsvColumn<BatchObjectRow>[] {
  return (['radial', 'transverse', 'normal'] as const).map((axis, k) => ({
    name: `sigma_${axis[0]}_${when}_m`,
    unit: 'm',
    meaning: `One-sigma position error at screened_${when}_utc, ${axis}, 3 decimals`,
    cell: (row: BatchObjectRow) => fixedCell(of(row)[k], 3),
  }));
}

/**
 * Writes `batch-objects.csv` to `output` and ends it, the rows in the order given.
 *
 * @returns the number of rows written
 * @throws what `output` throws
 */
export async function writeBatchObjectsCsv(
  output: Writable,
  rows: Iterable<BatchObjectRow>,
): Promise<number> {
  return writeCsv(output, BATCH_OBJECT_COLUMNS, rows);
}
