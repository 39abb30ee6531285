import type { Writable } from 'node:stream';
import { compareDesignators } from './compare-designators.js';
import { type CsvColumn, fixedCell, utcCell, writeCsv } from './csv-text.js';
import {
  CLOSEST_COLUMNS,
  explainedAs,
  LAUNCH_CAUTION_COLUMN,
  OBJECT_COLUMNS,
  remarksColumn,
  slowestSpeedColumn,
} from './shared-columns.js';

export type PairTrend = 'OPENING' | 'CLOSING' | 'STEADY';

/** Why a row is not what it looks like; explained in the README. */
const PAIR_REMARKS = {
  'closest-at-start': 'The two are closest where their common time begins, such as at release.',
  'closest-at-end': 'The two are closest where their common time ends: they are still coming closer.',
  'inside-at-end': 'The two are within the screening distance where their common time ends.',
  'flies-along': 'Object 2 is no object of the batch: one of fleet or catalog that flies along with it.',
} as const satisfies Readonly<Record<string, string>>;

export type PairRemark = keyof typeof PAIR_REMARKS;

/** Two objects of one deployment, told once; times in milliseconds of UTC since 1970-01-01. */
export type BatchPair = {
  readonly object1: { readonly designator: string; readonly name: string };
  readonly object2: { readonly designator: string; readonly name: string };
  readonly closestMs: number;
  readonly closestDistanceM: number;
  readonly closestSpeedMPerS: number;
  readonly slowestMPerS: number;
  readonly lastInsideMs: number;
  readonly trend: PairTrend;
  readonly trendMPerDay: number;
  readonly endMs: number;
  readonly endDistanceM: number;
  readonly remarks: readonly PairRemark[];
};

/** The columns of `batch-pairs.csv`; new ones only ever follow the last one. */
export const BATCH_PAIR_COLUMNS: readonly CsvColumn<BatchPair>[] = [
  ...explainedAs(OBJECT_COLUMNS, [
    'Designator of object 1, of the batch',
    'Its name, empty if the elements give none',
    'Designator of object 2: of the batch, or the catalog number of an object that flies along',
    'Its name, empty if the elements give none',
  ]),
  ...CLOSEST_COLUMNS,
  {
    name: 'closest_relative_speed_m_s',
    unit: 'm/s',
    meaning: 'Their relative speed then, 4 decimals',
    cell: (row) => fixedCell(row.closestSpeedMPerS, 4),
  },
  slowestSpeedColumn('while within the screening distance'),
  {
    name: 'last_inside_utc',
    unit: 'UTC',
    meaning: 'When they were last within the screening distance; the end of their common time if still then',
    cell: (row) => utcCell(row.lastInsideMs),
  },
  {
    name: 'trend',
    unit: '',
    meaning:
      'OPENING, CLOSING or STEADY: their mean distance over the last revolution against the one before; STEADY ' +
      'where it changes by less than 0.1 percent',
    cell: (row) => row.trend,
  },
  {
    name: 'trend_m_per_day',
    unit: 'm/d',
    meaning: 'That change for each day, negative when closing, 1 decimal',
    cell: (row) => fixedCell(row.trendMPerDay, 1),
  },
  {
    name: 'end_utc',
    unit: 'UTC',
    meaning: 'End of their common time in the window: where it ends, or the elements of one of them',
    cell: (row) => utcCell(row.endMs),
  },
  {
    name: 'end_distance_m',
    unit: 'm',
    meaning: 'Their distance then, 3 decimals',
    cell: (row) => fixedCell(row.endDistanceM, 3),
  },
  remarksColumn('what to know about the row'),
  LAUNCH_CAUTION_COLUMN,
];

/** Closest pair first, then by designators; the given array stays as it is. */
export function sortBatchPairs(pairs: readonly BatchPair[]): BatchPair[] {
  return pairs.toSorted(
    (a, b) =>
      a.closestDistanceM - b.closestDistanceM ||
      compareDesignators(a.object1.designator, b.object1.designator) ||
      compareDesignators(a.object2.designator, b.object2.designator),
  );
}

/**
 * Writes `batch-pairs.csv` to `output` and ends it, the pairs in the order given.
 *
 * @returns the number of pairs written
 * @throws what `output` throws
 */
export async function writeBatchPairsCsv(output: Writable, pairs: Iterable<BatchPair>): Promise<number> {
  return writeCsv(output, BATCH_PAIR_COLUMNS, pairs);
}
