import { type CsvColumn, fixedCell, textCell } from '../../tables/csv-text.js';
import { CAUTION_COLUMN } from '../../tables/shared-columns.js';
import { AGE_KNOTS_DAYS } from '../../uncertainty/calibrate-age-knots.js';
import { differenceSigmaM } from '../../uncertainty/calibrate-growth-law.js';
import type { SigmaClassBounds } from '../../uncertainty/sigma-table.js';
import type { AgeBin } from './age-bins.js';
import type { ErrorGrowth } from './error-growth.js';
import type { ObjectResult } from './object-result.js';
import { boundCell, type ClassResult } from './sigma-table-csv.js';

/** What the differences of one object or class showed at one age. */
type BinRow = {
  readonly designator: string;
  readonly orbitClass: SigmaClassBounds | undefined;
  readonly standing: string;
  readonly knot: number;
  readonly bin: AgeBin;
  readonly growth: ErrorGrowth | undefined;
};

const AXES = ['radial', 'transverse', 'normal'];

export const BIN_COLUMNS: readonly CsvColumn<BinRow>[] = [
  {
    name: 'object_designator',
    unit: '',
    meaning: 'Catalog number; empty in the row of an orbit class',
    cell: (row) => textCell(row.designator),
  },
  ...bounds(),
  {
    name: 'standing',
    unit: '',
    meaning: 'own rows or class rows: in the table; too few pairs, biased: not in the table, and why',
    cell: (row) => row.standing,
  },
  {
    name: 'age_d',
    unit: 'd',
    meaning: 'Age knot that the pairs belong to',
    cell: (row) => String(AGE_KNOTS_DAYS[row.knot]),
  },
  {
    name: 'age_measured_d',
    unit: 'd',
    meaning: 'Middle of the ages of the pairs, 3 decimals',
    cell: (row) => fixedCell(row.bin.ageDays, 3),
  },
  { name: 'samples', unit: '', meaning: 'Pairs', cell: (row) => String(row.bin.samples) },
  {
    name: 'samples_disjoint',
    unit: '',
    meaning: 'Pairs that do not overlap in time',
    cell: (row) => String(row.bin.disjoint),
  },
  { name: 'objects', unit: '', meaning: 'Objects they come from', cell: (row) => String(row.bin.objects) },
  ...axisColumns('bias', 'Median of older minus newer set', (row, axis) => row.bin.biasRtnM[axis]),
  ...axisColumns(
    'difference_sigma',
    'Robust sigma of the differences about their median',
    (row, axis) => row.bin.sigmaRtnM[axis],
  ),
  ...axisColumns('fitted_difference_sigma', 'The same after the fitted law', (row, axis) =>
    row.growth === undefined ? undefined : differenceSigmaM(row.growth.laws[axis], row.bin.ageDays),
  ),
  CAUTION_COLUMN,
];

/** All bins that hold anything: classes first, then objects by designator. */
export function* binRows(
  classes: readonly ClassResult[],
  objects: readonly ObjectResult[],
): Generator<BinRow> {
  for (const { orbitClass, bins, growth } of classes) {
    const standing = growth === undefined ? 'too few pairs' : 'class rows';
    yield* rowsOf({ designator: '', orbitClass, standing, growth }, bins);
  }
  for (const { designator, bins, growth, standing } of objects) {
    yield* rowsOf({ designator: String(designator), orbitClass: undefined, standing, growth }, bins);
  }
}

function* rowsOf(
  whose: Omit<BinRow, 'knot' | 'bin'>,
  bins: ReadonlyArray<AgeBin | undefined>,
): Generator<BinRow> {
  for (const [knot, bin] of bins.entries()) {
    if (bin !== undefined) yield { ...whose, knot, bin };
  }
}

function bounds(): CsvColumn<BinRow>[] {
  const keys = {
    perigee_min_km: 'perigeeMinKm',
    perigee_max_km: 'perigeeMaxKm',
    eccentricity_max: 'eccentricityMax',
    inclination_min_deg: 'inclinationMinDeg',
    inclination_max_deg: 'inclinationMaxDeg',
  } as const;
  return Object.entries(keys).map(([name, key]) => ({
    name,
    unit: '',
    meaning: 'Bound of the orbit class, as in the table',
    cell: ({ orbitClass }) => (orbitClass === undefined ? '' : boundCell(orbitClass[key])),
  }));
}

function axisColumns(
  name: string,
  meaning: string,
  value: (row: BinRow, axis: number) => number | undefined,
): CsvColumn<BinRow>[] {
  return AXES.map((axis, index) => ({
    name: `${name}_${axis[0]}_m`,
    unit: 'm',
    meaning: `${meaning}, ${axis}, 1 decimal`,
    cell: (row) => fixedCell(value(row, index), 1),
  }));
}
