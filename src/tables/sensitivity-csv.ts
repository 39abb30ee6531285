import { type BulkColumn, bulkColumn } from './bulk-column.js';
import { putExponent, putFixed, putOneOfFew, putWhole } from './csv-bytes.js';
import { CAUTION_COLUMN, DESIGNATOR_COLUMNS, TCA_COLUMN } from './shared-columns.js';

/** How the probability of one conjunction changes when all its sigmas are scaled by one factor. */
export type ConjunctionSensitivity = {
  /** Rank in `conjunctions.csv`. */
  readonly rank: number;
  readonly tcaMs: number;
  readonly object1: { readonly designator: string };
  readonly object2: { readonly designator: string };
  /** At half, once and twice the sigmas; `undefined` where no figure can be given. */
  readonly probabilityAtHalf: number | undefined;
  readonly probabilityAtOnce: number | undefined;
  readonly probabilityAtTwice: number | undefined;
  /** Factor on the sigmas at which the probability is highest, and its value there. */
  readonly peakScale: number | undefined;
  readonly peakProbability: number | undefined;
};

/** Within this of 1 the sigmas count as standing at the peak, where the curve is flat. */
const PEAK_TOLERANCE = 0.05;

/**
 * Says in words what better orbits would do to the probability. Left of the peak (scale over 1) smaller
 * sigmas lower it; right of it (scale under 1, the dilution region: Alfano, "Relating Position Uncertainty
 * to Maximum Conjunction Probability", J. Astronautical Sciences 53(2), 2005) a low probability tells of
 * poor orbits, not of safety.
 *
 * @param peakScale factor on the sigmas at which the probability is highest, `undefined` if there is none
 */
export function describeSensitivity(peakScale: number | undefined): string {
  if (peakScale === undefined || Number.isNaN(peakScale)) return 'no figure';
  if (peakScale > 1 + PEAK_TOLERANCE) return 'better orbits would lower the probability';
  if (peakScale < 1 - PEAK_TOLERANCE) return 'diluted: better orbits may raise the probability';
  return 'at its peak: any other sigmas would lower the probability';
}

/** The columns of `sensitivity.csv`. */
export const SENSITIVITY_COLUMNS: readonly BulkColumn<ConjunctionSensitivity>[] = [
  bulkColumn({
    name: 'rank',
    unit: '',
    meaning: 'Rank of the conjunction in conjunctions.csv',
    put: (out, row) => putWhole(out, row.rank),
  }),
  TCA_COLUMN,
  ...DESIGNATOR_COLUMNS,
  bulkColumn({
    name: 'collision_probability_half_sigma',
    unit: '0 to 1',
    meaning: 'Probability with all sigmas halved, six significant digits; empty where no figure can be given',
    put: (out, row) => putExponent(out, row.probabilityAtHalf),
  }),
  bulkColumn({
    name: 'collision_probability_once_sigma',
    unit: '0 to 1',
    meaning: 'Probability with the sigmas as they are',
    put: (out, row) => putExponent(out, row.probabilityAtOnce),
  }),
  bulkColumn({
    name: 'collision_probability_twice_sigma',
    unit: '0 to 1',
    meaning: 'Probability with all sigmas doubled',
    put: (out, row) => putExponent(out, row.probabilityAtTwice),
  }),
  bulkColumn({
    name: 'peak_sigma_scale',
    unit: '',
    meaning: 'Factor on all sigmas at which the probability is highest, 4 decimals',
    put: (out, row) => putFixed(out, row.peakScale, 4),
  }),
  bulkColumn({
    name: 'collision_probability_peak',
    unit: '0 to 1',
    meaning: 'Probability at that factor, six significant digits',
    put: (out, row) => putExponent(out, row.peakProbability),
  }),
  bulkColumn({
    name: 'direction',
    unit: '',
    meaning: 'In words: what smaller sigmas, that is better orbits, would do to the probability',
    put: (out, row) => putOneOfFew(out, describeSensitivity(row.peakScale)),
  }),
  CAUTION_COLUMN,
];
