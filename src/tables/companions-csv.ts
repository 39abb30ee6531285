import type { Writable } from 'node:stream';
import { type CsvColumn, fixedCell, textCell, utcCell, writeCsv } from './csv-text.js';
import { CAUTION_COLUMN, OBJECT_COLUMNS } from './shared-columns.js';

/** One object of a pair that flies together. */
export type CompanionObject = {
  readonly designator: string;
  readonly name: string;
};

/**
 * Two objects that stay within the screening distance of each other over the whole window, docked ones
 * for instance: told once instead of as an endless encounter.
 */
export type CompanionPair = {
  readonly object1: CompanionObject;
  readonly object2: CompanionObject;
  /** When they are closest, milliseconds of UTC since 1970-01-01. */
  readonly closestMs: number;
  readonly closestDistanceM: number;
  readonly farthestDistanceM: number;
  readonly fastestMPerS: number;
  readonly slowestMPerS: number;
  /** Short codes, as those of a conjunction. */
  readonly remarks: readonly string[];
};

/** The columns of `companions.csv`. */
export const COMPANION_COLUMNS: readonly CsvColumn<CompanionPair>[] = [
  ...OBJECT_COLUMNS,
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
  {
    name: 'farthest_distance_m',
    unit: 'm',
    meaning: 'Their greatest distance in the window, 3 decimals',
    cell: (row) => fixedCell(row.farthestDistanceM, 3),
  },
  {
    name: 'slowest_relative_speed_m_s',
    unit: 'm/s',
    meaning: 'Their smallest relative speed in the window, 4 decimals',
    cell: (row) => fixedCell(row.slowestMPerS, 4),
  },
  {
    name: 'fastest_relative_speed_m_s',
    unit: 'm/s',
    meaning: 'Their greatest relative speed in the window, 4 decimals',
    cell: (row) => fixedCell(row.fastestMPerS, 4),
  },
  {
    name: 'remarks',
    unit: '',
    meaning:
      'Codes of what makes the figures less trustworthy, one blank between them; empty if there is none',
    cell: (row) => textCell(row.remarks.join(' ')),
  },
  CAUTION_COLUMN,
];

/**
 * Writes `companions.csv` to `output` and ends it, the pairs in the order given.
 *
 * @returns the number of pairs written
 * @throws what `output` throws
 */
export async function writeCompanionsCsv(
  output: Writable,
  pairs: Iterable<CompanionPair> | AsyncIterable<CompanionPair>,
): Promise<number> {
  return writeCsv(output, COMPANION_COLUMNS, pairs);
}
