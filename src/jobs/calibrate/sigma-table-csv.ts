import { CAUTION } from '../../caution.js';
import { type CsvColumn, fixedCell, textCell } from '../../tables/csv-text.js';
import { AGE_KNOTS_DAYS } from '../../uncertainty/calibrate-age-knots.js';
import type { SigmaClassBounds } from '../../uncertainty/sigma-table.js';
import type { Vector3 } from '../../vector.js';
import type { AgeBin } from './age-bins.js';
import { type ErrorGrowth, tableAgesDays, tableSigmaRtnM } from './error-growth.js';
import type { ObjectResult } from './object-result.js';

/** One row of the table that `screen --sigma` reads. */
type SigmaTableRow = {
  /** `''` in the row of a class. */
  readonly designator: string;
  /** `undefined` in the row of an object. */
  readonly orbitClass: SigmaClassBounds | undefined;
  readonly ageDays: number;
  readonly sigmaRtnM: Vector3;
  /** Differences measured at this age; 0 at the epoch, where the fit is carried to. */
  readonly samples: number;
};

/** What a class of orbits showed. */
export type ClassResult = {
  readonly orbitClass: SigmaClassBounds;
  readonly bins: ReadonlyArray<AgeBin | undefined>;
  /** `undefined` when there is too little for rows. */
  readonly growth: ErrorGrowth | undefined;
};

export const SIGMA_TABLE_COLUMNS: readonly CsvColumn<SigmaTableRow>[] = [
  {
    name: 'object_designator',
    unit: '',
    meaning: 'Catalog number; empty in the row of an orbit class',
    cell: (row) => textCell(row.designator),
  },
  bound(
    'perigee_min_km',
    'km',
    'Lowest perigee height of the class; empty for no bound',
    (c) => c.perigeeMinKm,
  ),
  bound('perigee_max_km', 'km', 'Perigee height below which the class ends', (c) => c.perigeeMaxKm),
  bound('eccentricity_max', '', 'Eccentricity below which the class ends', (c) => c.eccentricityMax),
  bound('inclination_min_deg', 'deg', 'Lowest inclination of the class', (c) => c.inclinationMinDeg),
  bound('inclination_max_deg', 'deg', 'Inclination below which the class ends', (c) => c.inclinationMaxDeg),
  { name: 'age_d', unit: 'd', meaning: 'Age of the element set', cell: (row) => String(row.ageDays) },
  sigma('sigma_r_m', 'radial', 0),
  sigma('sigma_t_m', 'transverse', 1),
  sigma('sigma_n_m', 'normal', 2),
  {
    name: 'samples',
    unit: '',
    meaning: 'Differences measured at this age; 0 at age 0, where the fit is carried to',
    cell: (row) => String(row.samples),
  },
];

/** Lines above the header, which readers of the table skip: the caution, and what no column tells. */
export function sigmaTableHead(commonErrorFactor: number): string {
  return `# ${CAUTION}\r\n# Measured by pairwise differencing; common-error factor ${commonErrorFactor}\r\n`;
}

/** The rows of the table: classes first, in their order, then objects by designator. */
export function* sigmaTableRows(
  classes: readonly ClassResult[],
  objects: readonly ObjectResult[],
  commonErrorFactor: number,
): Generator<SigmaTableRow> {
  for (const { orbitClass, bins, growth } of classes) {
    if (growth !== undefined) yield* rowsOf('', orbitClass, bins, growth, commonErrorFactor);
  }
  for (const { designator, bins, growth } of objects) {
    if (growth !== undefined) yield* rowsOf(String(designator), undefined, bins, growth, commonErrorFactor);
  }
}

function* rowsOf(
  designator: string,
  orbitClass: SigmaClassBounds | undefined,
  bins: ReadonlyArray<AgeBin | undefined>,
  growth: ErrorGrowth,
  factor: number,
): Generator<SigmaTableRow> {
  for (const ageDays of tableAgesDays(growth)) {
    const [radial, transverse, normal] = tableSigmaRtnM(growth, ageDays);
    yield {
      designator,
      orbitClass,
      ageDays,
      sigmaRtnM: [radial * factor, transverse * factor, normal * factor],
      samples: bins[AGE_KNOTS_DAYS.indexOf(ageDays)]?.samples ?? 0,
    };
  }
}

/** A bound of a class; empty where there is none. */
export function boundCell(value: number): string {
  return Number.isFinite(value) ? String(value) : '';
}

function bound(
  name: string,
  unit: string,
  meaning: string,
  value: (orbitClass: SigmaClassBounds) => number,
): CsvColumn<SigmaTableRow> {
  return {
    name,
    unit,
    meaning,
    cell: ({ orbitClass }) => (orbitClass === undefined ? '' : boundCell(value(orbitClass))),
  };
}

function sigma(name: string, axis: string, index: number): CsvColumn<SigmaTableRow> {
  return {
    name,
    unit: 'm',
    meaning: `One-sigma, ${axis}, 1 decimal`,
    cell: (row) => fixedCell(row.sigmaRtnM[index], 1),
  };
}
