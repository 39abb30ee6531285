import type { Writable } from 'node:stream';
import { type CsvColumn, exponentCell, fixedCell, utcCell, writeCsv } from './csv-text.js';
import { CAUTION_COLUMN, OBJECT_COLUMNS } from './shared-columns.js';

/** How an encounter stands tonight against the runs before; explained at the column `change`. */
export const CHANGE_KINDS = [
  'rose',
  'new',
  'fell',
  'steady',
  'gone',
  'not-screened',
  'outside-window',
  'past',
] as const;

export type ChangeKind = (typeof CHANGE_KINDS)[number];

/** What one run says of an encounter, as far as another run is compared with it. */
type ChangeFigures = {
  readonly tcaMs: number;
  readonly missDistanceM: number;
  readonly collisionProbability: number | undefined;
};

/** One row of `changes.csv`. */
export type Change = {
  readonly kind: ChangeKind;
  readonly object1: { readonly designator: string; readonly name: string };
  readonly object2: { readonly designator: string; readonly name: string };
  /** Tonight's figures; `undefined` where tonight does not list the encounter. */
  readonly current: ChangeFigures | undefined;
  /** Of the latest run before that lists it; `undefined` for a new one. */
  readonly previous: ChangeFigures | undefined;
  /** Start of the window of the first run that listed it, milliseconds of UTC since 1970-01-01. */
  readonly firstSeenMs: number;
  /** How many runs listed it, tonight's included. */
  readonly runsSeen: number;
};

/** The columns of `changes.csv`; the order is fixed, new columns only ever follow the last one. */
export const CHANGES_COLUMNS: readonly CsvColumn<Change>[] = [
  {
    name: 'change',
    unit: '',
    meaning:
      'rose or fell: the collision probability by a factor of 2 or more (below 1E-10 every probability counts as 1E-10; ' +
      'without a probability on both sides, the miss distance halved or doubled); steady: less than that; ' +
      'new: in no run before; gone: no longer inside what this run lists, though both objects were screened at that time; ' +
      'not-screened: one of the objects was not in this run, or the two now fly together (companions.csv); outside-window: later than the window of this run; ' +
      'past: over before the start of this run',
    cell: (row) => row.kind,
  },
  ...OBJECT_COLUMNS,
  {
    name: 'tca_utc',
    unit: 'UTC',
    meaning:
      'Time of closest approach in this run, ISO 8601 to the millisecond; empty where this run does not list it',
    cell: (row) => utcCell(row.current?.tcaMs),
  },
  {
    name: 'previous_tca_utc',
    unit: 'UTC',
    meaning: 'The same in the latest run before that lists the encounter; empty for a new one',
    cell: (row) => utcCell(row.previous?.tcaMs),
  },
  {
    name: 'miss_distance_m',
    unit: 'm',
    meaning: 'Distance at closest approach in this run, 3 decimals',
    cell: (row) => fixedCell(row.current?.missDistanceM, 3),
  },
  {
    name: 'previous_miss_distance_m',
    unit: 'm',
    meaning: 'The same in the run before',
    cell: (row) => fixedCell(row.previous?.missDistanceM, 3),
  },
  {
    name: 'collision_probability',
    unit: '0 to 1',
    meaning:
      'Probability of collision in this run, six significant digits; empty where no figure can be given',
    cell: (row) => exponentCell(row.current?.collisionProbability),
  },
  {
    name: 'previous_collision_probability',
    unit: '0 to 1',
    meaning: 'The same in the run before',
    cell: (row) => exponentCell(row.previous?.collisionProbability),
  },
  {
    name: 'first_seen_utc',
    unit: 'UTC',
    meaning: 'Start of the window of the first run that listed the encounter',
    cell: (row) => utcCell(row.firstSeenMs),
  },
  {
    name: 'runs_seen',
    unit: '',
    meaning: 'Number of runs that listed it, this one included',
    cell: (row) => String(row.runsSeen),
  },
  CAUTION_COLUMN,
];

/** Writes `changes.csv` to `output` and ends it, in the order given. */
export async function writeChangesCsv(output: Writable, changes: Iterable<Change>): Promise<number> {
  return writeCsv(output, CHANGES_COLUMNS, changes);
}
