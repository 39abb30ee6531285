import { DESIGNATOR_IN_WORDS, parseDesignator } from '../elements/batch-designator.js';
import { InputError } from '../input-error.js';
import type { Matrix3, Vector3 } from '../vector.js';
import { type CsvRecord, numberCell, readCsv } from './read-csv.js';

/** The columns of a sigma table. */
export const SIGMA_COLUMNS = [
  'object_designator',
  'perigee_min_km',
  'perigee_max_km',
  'eccentricity_max',
  'inclination_min_deg',
  'inclination_max_deg',
  'age_d',
  'sigma_r_m',
  'sigma_t_m',
  'sigma_n_m',
  'samples',
] as const;

/** Bounds of a class of orbits: the lower ones belong to it, the upper ones do not. */
export type SigmaClassBounds = {
  /** Height above 6378.135 km (WGS-72 equatorial radius), as that of the other bounds. */
  readonly perigeeMinKm: number;
  readonly perigeeMaxKm: number;
  readonly eccentricityMax: number;
  readonly inclinationMinDeg: number;
  readonly inclinationMaxDeg: number;
};

/** One-sigma in RTN by age of the elements: flat arrays, for use in bulk. */
export type SigmaCurve = {
  /** Rising. */
  readonly ageDays: Float64Array;
  /** Radial, transverse, normal of each age one after the other, meters. */
  readonly sigmaRtnM: Float64Array;
  /** Taken from the built-in figures, not from a table that the user gave. */
  readonly isDefault: boolean;
  /** Where the curve comes from: file and line, or the built-in class. */
  readonly label: string;
};

export type SigmaClass = SigmaClassBounds & { readonly curve: SigmaCurve };

export type SigmaTable = {
  /** In the order of the file: the first class that covers an orbit counts. */
  readonly classes: readonly SigmaClass[];
  /** By designator, numbers in decimal without leading zeros. */
  readonly objects: ReadonlyMap<string, SigmaCurve>;
};

/** What a curve is chosen by. */
export type SigmaKey = {
  readonly designator: string;
  /** Mean perigee height above 6378.135 km. */
  readonly perigeeHeightKm: number;
  readonly eccentricity: number;
  readonly inclinationDeg: number;
};

/**
 * Reads a sigma table from CSV (see `readCsv`) with the columns `SIGMA_COLUMNS`; `samples` may be left out.
 *
 * Rows of one designator, or of five equal bounds, make one curve, their ages rising down the file. In a
 * row with a designator the bounds are not used. An empty bound is no bound. Where classes overlap, the one
 * whose first row stands higher in the file counts.
 *
 * @param file as the user named it, for errors
 * @throws InputError with file, line and value for anything else
 */
export function readSigmaTable(text: string, file: string): SigmaTable {
  const records = readCsv(text, file, SIGMA_COLUMNS.slice(0, -1), ['samples']);
  if (records.length === 0)
    throw new InputError(`${file} has no rows: give at least one, or leave the table out`);
  const groups = new Map<string, { bounds: SigmaClassBounds | undefined; rows: SigmaRow[] }>();
  for (const record of records) {
    const designator = designatorOf(record, file);
    const bounds = designator === '' ? boundsOf(record, file) : undefined;
    const row = rowOf(record, file);
    const key = bounds === undefined ? designator : Object.values(bounds).join(' ');
    const group = groups.get(key);
    if (group === undefined) {
      groups.set(key, { bounds, rows: [row] });
      continue;
    }
    const before = group.rows[group.rows.length - 1];
    if (row.ageDays <= before.ageDays) {
      throw new InputError(
        `${file}:${row.line}: age_d is ${row.ageDays}, but line ${before.line} of the same ${bounds === undefined ? 'object' : 'class'} has ${before.ageDays}: put its rows in order of rising age`,
      );
    }
    group.rows.push(row);
  }
  const classes: SigmaClass[] = [];
  const objects = new Map<string, SigmaCurve>();
  for (const [key, { bounds, rows }] of groups) {
    const curve = sigmaCurve(rows, false, `${file}:${rows[0].line}`);
    if (bounds === undefined) objects.set(key, curve);
    else classes.push({ ...bounds, curve });
  }
  return { classes, objects };
}

/** Figures at one age. */
export type SigmaKnot = { readonly ageDays: number; readonly sigmaRtnM: Vector3 };
type SigmaRow = SigmaKnot & { readonly line: number };

/** A curve through `knots`, which rise in age. */
export function sigmaCurve(knots: readonly SigmaKnot[], isDefault: boolean, label: string): SigmaCurve {
  return {
    ageDays: Float64Array.from(knots, (knot) => knot.ageDays),
    sigmaRtnM: Float64Array.from(knots.flatMap((knot) => [...knot.sigmaRtnM])),
    isDefault,
    label,
  };
}

/**
 * The curve of an object: its own rows in the table, else the first class of the table that covers its
 * orbit, else (`isDefault`) the first class of `fallback` that does.
 *
 * @param table `undefined` where the user gave none
 * @param fallback covers every orbit, as `defaultSigmaTable` does
 * @throws RangeError if no class of `fallback` covers the orbit either
 */
export function sigmaCurveFor(
  table: SigmaTable | undefined,
  fallback: SigmaTable,
  key: SigmaKey,
): SigmaCurve {
  const own = table?.objects.get(key.designator);
  if (own !== undefined) return own;
  for (const each of table?.classes ?? []) if (covers(each, key)) return each.curve;
  for (const each of fallback.classes) if (covers(each, key)) return each.curve;
  throw new RangeError(
    `no class of sigmas covers perigee height ${key.perigeeHeightKm} km, eccentricity ${key.eccentricity}, inclination ${key.inclinationDeg} deg`,
  );
}

/** Whether a class covers an orbit. */
export function covers(bounds: SigmaClassBounds, key: Omit<SigmaKey, 'designator'>): boolean {
  return (
    key.perigeeHeightKm >= bounds.perigeeMinKm &&
    key.perigeeHeightKm < bounds.perigeeMaxKm &&
    key.eccentricity < bounds.eccentricityMax &&
    key.inclinationDeg >= bounds.inclinationMinDeg &&
    key.inclinationDeg < bounds.inclinationMaxDeg
  );
}

/**
 * One-sigma in RTN at an age of the elements: the first figures up to the first age, straight lines between
 * the ages, and the slope of the last two carried on beyond the last age (a falling one as level: elements
 * do not get better by waiting). Elements from after the time they are used for are propagated backwards
 * and get worse in the same way, so the sign of the age does not count.
 *
 * @param ageDays days
 * @returns radial, transverse, normal, meters
 */
export function sigmaAt(curve: SigmaCurve, ageDays: number): Vector3 {
  const age = Math.abs(ageDays);
  if (!Number.isFinite(age)) throw new RangeError(`ageDays must be a finite number, got ${ageDays}`);
  const { ageDays: ages, sigmaRtnM: sigmas } = curve;
  const last = ages.length - 1;
  if (last === 0 || age <= ages[0]) return [sigmas[0], sigmas[1], sigmas[2]];
  let right = 1;
  while (right < last && ages[right] < age) right++;
  const part = (age - ages[right - 1]) / (ages[right] - ages[right - 1]);
  const component = (axis: 0 | 1 | 2): number => {
    const before = sigmas[3 * right - 3 + axis];
    const after = sigmas[3 * right + axis];
    if (part > 1 && after < before) return after;
    return before + part * (after - before);
  };
  return [component(0), component(1), component(2)];
}

/** Whether an age, positive or negative, lies beyond the last age of a curve, where its slope is carried on. */
export function isBeyond(curve: SigmaCurve, ageDays: number): boolean {
  return Math.abs(ageDays) > curve.ageDays[curve.ageDays.length - 1];
}

/** The covariance of uncorrelated errors in RTN, square meters. */
export function covarianceRtnM2(sigmaRtnM: Vector3): Matrix3 {
  const [r, t, n] = sigmaRtnM;
  return [
    [r * r, 0, 0],
    [0, t * t, 0],
    [0, 0, n * n],
  ];
}

const SIGMA = ['a number of meters greater than 0', (value: number) => value > 0] as const;
const ANY = ['a number, or an empty cell for no bound', () => true] as const;
const COUNT = [
  'a whole number of 0 or more, or an empty cell',
  (v: number) => Number.isInteger(v) && v >= 0,
] as const;

function rowOf(record: CsvRecord, file: string): SigmaRow {
  if (record.cells.samples !== '') numberCell(record, file, 'samples', COUNT);
  return {
    line: record.line,
    ageDays: numberCell(record, file, 'age_d', ['a number of days, 0 or more', (value) => value >= 0]),
    sigmaRtnM: [
      numberCell(record, file, 'sigma_r_m', SIGMA),
      numberCell(record, file, 'sigma_t_m', SIGMA),
      numberCell(record, file, 'sigma_n_m', SIGMA),
    ],
  };
}

function designatorOf(record: CsvRecord, file: string): string {
  const text = record.cells.object_designator;
  if (text === '') return '';
  const designator = parseDesignator(text);
  if (designator === undefined) {
    throw new InputError(
      `${file}:${record.line}: object_designator is ${JSON.stringify(text)}, expected ${DESIGNATOR_IN_WORDS}, or an empty cell for a class of orbits`,
    );
  }
  return designator;
}

function boundsOf(record: CsvRecord, file: string): SigmaClassBounds {
  const bound = (column: string, none: number) =>
    record.cells[column] === '' ? none : numberCell(record, file, column, ANY);
  const bounds = {
    perigeeMinKm: bound('perigee_min_km', Number.NEGATIVE_INFINITY),
    perigeeMaxKm: bound('perigee_max_km', Number.POSITIVE_INFINITY),
    eccentricityMax: bound('eccentricity_max', Number.POSITIVE_INFINITY),
    inclinationMinDeg: bound('inclination_min_deg', Number.NEGATIVE_INFINITY),
    inclinationMaxDeg: bound('inclination_max_deg', Number.POSITIVE_INFINITY),
  };
  const { cells, line } = record;
  for (const [low, high, empty] of [
    ['perigee_min_km', 'perigee_max_km', bounds.perigeeMinKm >= bounds.perigeeMaxKm],
    ['inclination_min_deg', 'inclination_max_deg', bounds.inclinationMinDeg >= bounds.inclinationMaxDeg],
  ] as const) {
    if (empty) {
      throw new InputError(
        `${file}:${line}: ${low} is ${cells[low]} and ${high} ${cells[high]}: no orbit lies between`,
      );
    }
  }
  if (bounds.eccentricityMax <= 0) {
    throw new InputError(
      `${file}:${line}: eccentricity_max is ${cells.eccentricity_max}, expected a number greater than 0: no orbit is below it`,
    );
  }
  return bounds;
}
