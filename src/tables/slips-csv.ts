import type { Writable } from 'node:stream';
import { type CsvColumn, exponentCell, fixedCell, textCell, utcCell, writeCsv } from './csv-text.js';
import { LAUNCH_CAUTION_COLUMN } from './shared-columns.js';

/** One encounter of a candidate liftoff, as far as its row tells it. */
export type LiftoffEncounter = {
  readonly object1Designator: string;
  readonly object2Designator: string;
  readonly object2Name: string;
  /** Milliseconds of UTC since 1970-01-01, as all times here. */
  readonly tcaMs: number;
  readonly missDistanceM: number;
  readonly collisionProbability: number | undefined;
};

/** Why a liftoff is not clear. */
export type BrokenLimit = 'any encounter' | 'too close' | 'too probable' | 'no probability' | 'flying along';

/** What one candidate liftoff would meet. */
export type LiftoffRow = {
  readonly liftoffMs: number;
  readonly slipMs: number;
  /** 1 is the best. */
  readonly bestRank: number;
  readonly isClear: boolean;
  /** Which limits are broken, in the order of `why_not`. */
  readonly broken: readonly BrokenLimit[];
  /** In words, `''` for a clear liftoff. */
  readonly whyNot: string;
  readonly encounters: number;
  /** Encounters that break a limit, and objects that fly along. */
  readonly violations: number;
  readonly flyingAlong: number;
  readonly closest: LiftoffEncounter | undefined;
  readonly mostProbable: LiftoffEncounter | undefined;
};

/** The columns of `slips.csv`; new ones only ever follow the last one. */
export const SLIP_COLUMNS: readonly CsvColumn<LiftoffRow>[] = [
  {
    name: 'liftoff_utc',
    unit: 'UTC',
    meaning: 'Time of liftoff, ISO 8601 to the millisecond; rows are in the order of this time',
    cell: (row) => utcCell(row.liftoffMs),
  },
  {
    name: 'slip_min',
    unit: 'min',
    meaning: 'Liftoff minus nominal liftoff, 3 decimals',
    cell: (row) => fixedCell(row.slipMs / 60_000, 3),
  },
  {
    name: 'best_rank',
    unit: '',
    meaning:
      'Place of this liftoff, from 1 for the best: clear ones first, then by the fewest violations, the lowest ' +
      'highest probability, the greatest closest miss distance, the smallest slip, and the earlier liftoff',
    cell: (row) => String(row.bestRank),
  },
  {
    name: 'clear',
    unit: '',
    meaning:
      'YES if no encounter breaks a limit and nothing flies along, else NO. Limits: no encounter closer than ' +
      '--clear-km, none that reaches --alert-pc or has no probability; with neither option, no encounter at all',
    cell: (row) => (row.isClear ? 'YES' : 'NO'),
  },
  {
    name: 'why_not',
    unit: '',
    meaning: 'What breaks which limit, in words; empty for a clear liftoff',
    cell: (row) => textCell(row.whyNot),
  },
  {
    name: 'encounters',
    unit: '',
    meaning: 'Number of encounters of the batch with fleet and catalog in the window after this liftoff',
    cell: (row) => String(row.encounters),
  },
  {
    name: 'violations',
    unit: '',
    meaning: 'Number of encounters that break a limit, and of objects that fly along',
    cell: (row) => String(row.violations),
  },
  {
    name: 'flying_along',
    unit: '',
    meaning:
      'Number of objects of fleet and catalog that stay close to the batch and slow for its first day; their ' +
      'encounters are not counted one by one',
    cell: (row) => String(row.flyingAlong),
  },
  ...encounterColumns('closest', 'the encounter with the smallest miss distance', (row) => row.closest),
  ...encounterColumns(
    'most_probable',
    'the encounter with the highest probability',
    (row) => row.mostProbable,
  ),
  LAUNCH_CAUTION_COLUMN,
];

function encounterColumns(
  prefix: string,
  which: string,
  of: (row: LiftoffRow) => LiftoffEncounter | undefined,
): CsvColumn<LiftoffRow>[] {
  return [
    {
      name: `${prefix}_object1`,
      unit: '',
      meaning: `Object of the batch in ${which}, its designator; empty if there is none`,
      cell: (row) => textCell(of(row)?.object1Designator ?? ''),
    },
    {
      name: `${prefix}_object2`,
      unit: '',
      meaning: 'The other object, its catalog number in decimal',
      cell: (row) => textCell(of(row)?.object2Designator ?? ''),
    },
    {
      name: `${prefix}_object2_name`,
      unit: '',
      meaning: 'Its name, empty if the elements give none',
      cell: (row) => textCell(of(row)?.object2Name ?? ''),
    },
    {
      name: `${prefix}_tca_utc`,
      unit: 'UTC',
      meaning: `Time of closest approach of ${which}, ISO 8601 to the millisecond`,
      cell: (row) => utcCell(of(row)?.tcaMs),
    },
    {
      name: `${prefix}_miss_distance_m`,
      unit: 'm',
      meaning: 'Its miss distance, 3 decimals',
      cell: (row) => fixedCell(of(row)?.missDistanceM, 3),
    },
    {
      name: `${prefix}_probability`,
      unit: '0 to 1',
      meaning: 'Its probability of collision, six significant digits; empty where no figure can be given',
      cell: (row) => exponentCell(of(row)?.collisionProbability),
    },
  ];
}

/**
 * Writes `slips.csv` to `output` and ends it, the rows in the order given.
 *
 * @returns the number of rows written
 * @throws what `output` throws
 */
export async function writeSlipsCsv(output: Writable, rows: Iterable<LiftoffRow>): Promise<number> {
  return writeCsv(output, SLIP_COLUMNS, rows);
}
