import { type CsvColumn, fixedCell, utcCell } from '../../tables/csv-text.js';
import { CAUTION_COLUMN } from '../../tables/shared-columns.js';

/** A change of an orbit that pairs are not formed across. */
export type ManeuverRow = {
  readonly designator: number;
  readonly lastEpochBeforeMs: number;
  readonly firstEpochAfterMs: number;
  readonly semiMajorAxisChangeM: number;
  readonly planeChangeM: number;
};

export const MANEUVER_COLUMNS: readonly CsvColumn<ManeuverRow>[] = [
  {
    name: 'object_designator',
    unit: '',
    meaning: 'Catalog number',
    cell: (row) => String(row.designator),
  },
  {
    name: 'last_epoch_before_utc',
    unit: 'UTC',
    meaning: 'Epoch of the last set before the change',
    cell: (row) => utcCell(row.lastEpochBeforeMs),
  },
  {
    name: 'first_epoch_after_utc',
    unit: 'UTC',
    meaning: 'Epoch of the first set after it',
    cell: (row) => utcCell(row.firstEpochAfterMs),
  },
  {
    name: 'semi_major_axis_change_m',
    unit: 'm',
    meaning: 'Change of the mean semi-major axis from one to the other, drag taken off, 1 decimal',
    cell: (row) => fixedCell(row.semiMajorAxisChangeM, 1),
  },
  {
    name: 'plane_change_m',
    unit: 'm',
    meaning: 'Largest displacement normal to the orbit that the change of the plane makes, 1 decimal',
    cell: (row) => fixedCell(row.planeChangeM, 1),
  },
  CAUTION_COLUMN,
];
