import { CAUTION, LAUNCH_CAUTION } from '../caution.js';
import { type BulkColumn, bulkColumn } from './bulk-column.js';
import { putBytes, putText, putUtc } from './csv-bytes.js';
import { type CsvColumn, fixedCell, textCell, utcCell } from './csv-text.js';

type Numbered = { readonly designator: string };
type Side = 'object1' | 'object2';
type Named = Numbered & { readonly name: string };

/** Many rows share one list. */
const remarksCells = new WeakMap<readonly string[], Uint8Array>();

/** Who met whom, for tables without names. */
export const DESIGNATOR_COLUMNS = [
  designatorColumn('object1', (row: { readonly object1: Numbered }) => row.object1),
  designatorColumn('object2', (row: { readonly object2: Numbered }) => row.object2),
] as const;

/** Who met whom, for tables whose rows have both objects with designator and name. */
export const OBJECT_COLUMNS: readonly BulkColumn<{ readonly object1: Named; readonly object2: Named }>[] = [
  DESIGNATOR_COLUMNS[0],
  nameColumn('object1', (row) => row.object1),
  DESIGNATOR_COLUMNS[1],
  nameColumn('object2', (row) => row.object2),
];

export const TCA_COLUMN: BulkColumn<{ readonly tcaMs: number }> = bulkColumn({
  name: 'tca_utc',
  unit: 'UTC',
  meaning: 'Time of closest approach, ISO 8601 to the millisecond',
  put: (out, row) => putUtc(out, row.tcaMs),
});

/** When and how far apart two objects that are told once are closest. */
export const CLOSEST_COLUMNS: readonly CsvColumn<{
  readonly closestMs: number;
  readonly closestDistanceM: number;
}>[] = [
  {
    name: 'closest_utc',
    unit: 'UTC',
    meaning: 'When the two are closest in the window, ISO 8601 to the millisecond',
    cell: (row) => utcCell(row.closestMs),
  },
  {
    name: 'closest_distance_m',
    unit: 'm',
    meaning: 'Their smallest distance in the window, 3 decimals',
    cell: (row) => fixedCell(row.closestDistanceM, 3),
  },
];

/** @param when for which part of the window */
export function slowestSpeedColumn(when: string): CsvColumn<{ readonly slowestMPerS: number }> {
  return {
    name: 'slowest_relative_speed_m_s',
    unit: 'm/s',
    meaning: `Their smallest relative speed ${when}, 4 decimals`,
    cell: (row) => fixedCell(row.slowestMPerS, 4),
  };
}

/** @param what what the codes tell */
export function remarksColumn(what: string): BulkColumn<{ readonly remarks: readonly string[] }> {
  return bulkColumn({
    name: 'remarks',
    unit: '',
    meaning: `Codes of ${what}, one blank between them; empty if there is none`,
    put: (out, { remarks }) => {
      let cell = remarksCells.get(remarks);
      if (cell === undefined) {
        cell = Buffer.from(textCell(remarks.join(' ')));
        remarksCells.set(remarks, cell);
      }
      putBytes(out, cell);
    },
  });
}

/** What to say of a row that may not be trusted. */
export const DOUBTS_COLUMN = remarksColumn('what makes the figures less trustworthy');

/** Stands in every table. */
export const CAUTION_COLUMN = cautionColumn(CAUTION);

/** Stands in every table about a launch. */
export const LAUNCH_CAUTION_COLUMN = cautionColumn(LAUNCH_CAUTION);

/** The same columns, each explained in the words of one table. */
export function explainedAs<Row>(
  columns: readonly CsvColumn<Row>[],
  meanings: readonly string[],
): CsvColumn<Row>[] {
  return columns.map((column, i) => ({ ...column, meaning: meanings[i] }));
}

function designatorColumn<Row>(side: Side, objectOf: (row: Row) => Numbered): BulkColumn<Row> {
  return bulkColumn({
    name: `${side}_designator`,
    unit: '',
    meaning: `Catalog number of ${inWords(side)}, in decimal`,
    put: (out, row) => putText(out, objectOf(row).designator),
  });
}

function nameColumn<Row>(side: Side, objectOf: (row: Row) => Named): BulkColumn<Row> {
  return bulkColumn({
    name: `${side}_name`,
    unit: '',
    meaning: `Name of ${inWords(side)}, empty if the elements give none`,
    put: (out, row) => putText(out, objectOf(row).name),
  });
}

function inWords(side: Side): string {
  return side === 'object1' ? 'object 1' : 'object 2';
}

function cautionColumn(caution: string): BulkColumn<unknown> {
  const cell = Buffer.from(textCell(caution));
  return bulkColumn({
    name: 'caution',
    unit: '',
    meaning: 'What the figures are, and where to decide',
    put: (out) => putBytes(out, cell),
  });
}
