import type { Writable } from 'node:stream';
import { type CsvColumn, fixedCell, writeCsv } from './csv-text.js';
import {
  CAUTION_COLUMN,
  CLOSEST_COLUMNS,
  DOUBTS_COLUMN,
  OBJECT_COLUMNS,
  slowestSpeedColumn,
} from './shared-columns.js';

/** One object of a pair that flies together. */
type CompanionObject = {
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
const COMPANION_COLUMNS: readonly CsvColumn<CompanionPair>[] = [
  ...OBJECT_COLUMNS,
  ...CLOSEST_COLUMNS,
  {
    name: 'farthest_distance_m',
    unit: 'm',
    meaning: 'Their greatest distance in the window, 3 decimals',
    cell: (row) => fixedCell(row.farthestDistanceM, 3),
  },
  slowestSpeedColumn('in the window'),
  {
    name: 'fastest_relative_speed_m_s',
    unit: 'm/s',
    meaning: 'Their greatest relative speed in the window, 4 decimals',
    cell: (row) => fixedCell(row.fastestMPerS, 4),
  },
  DOUBTS_COLUMN,
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
