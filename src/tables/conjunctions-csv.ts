import { type BulkColumn, bulkColumn } from './bulk-column.js';
import type { Conjunction, ConjunctionObject } from './conjunction.js';
import { putExponent, putFixed, putOneOfFew, putUtc, putWhole } from './csv-bytes.js';
import { CAUTION_COLUMN, DOUBTS_COLUMN, OBJECT_COLUMNS, TCA_COLUMN } from './shared-columns.js';

/** What a row says; of its objects, a conjunction knows more. */
export type ConjunctionRow = Omit<Conjunction, 'object1' | 'object2'> & {
  readonly object1: ConjunctionRowObject;
  readonly object2: ConjunctionRowObject;
};

export type ConjunctionRowObject = Pick<
  ConjunctionObject,
  'designator' | 'name' | 'elementAgeDays' | 'sigmaRtnM'
>;

/**
 * The columns of `conjunctions.csv`. The order is fixed: loaders go by position, so new columns only ever
 * follow the last one.
 */
export const CONJUNCTION_COLUMNS: readonly BulkColumn<ConjunctionRow>[] = [
  bulkColumn({
    name: 'rank',
    unit: '',
    meaning:
      'Place in the order of the file, from 1: collision probability from high to low, then miss distance, ' +
      'time of closest approach and designators from low to high; rows without a probability come last',
    put: (out, _row, number) => putWhole(out, number),
  }),
  TCA_COLUMN,
  ...OBJECT_COLUMNS,
  bulkColumn({
    name: 'miss_distance_m',
    unit: 'm',
    meaning: 'Distance between the two objects at closest approach, 3 decimals',
    put: (out, row) => putFixed(out, row.missDistanceM, 3),
  }),
  bulkColumn({
    name: 'relative_speed_m_s',
    unit: 'm/s',
    meaning: 'Magnitude of the relative velocity at closest approach, 4 decimals',
    put: (out, row) => putFixed(out, row.relativeSpeedMPerS, 4),
  }),
  bulkColumn({
    name: 'relative_position_r_m',
    unit: 'm',
    meaning: 'Position of object 2 minus object 1, radial component in the RTN frame of object 1, 3 decimals',
    put: (out, row) => putFixed(out, row.relativePositionRtnM[0], 3),
  }),
  bulkColumn({
    name: 'relative_position_t_m',
    unit: 'm',
    meaning: 'The same, transverse component',
    put: (out, row) => putFixed(out, row.relativePositionRtnM[1], 3),
  }),
  bulkColumn({
    name: 'relative_position_n_m',
    unit: 'm',
    meaning: 'The same, normal component',
    put: (out, row) => putFixed(out, row.relativePositionRtnM[2], 3),
  }),
  bulkColumn({
    name: 'relative_velocity_r_m_s',
    unit: 'm/s',
    meaning:
      'Inertial velocity of object 2 minus object 1, radial component in the RTN frame of object 1, 4 decimals',
    put: (out, row) => putFixed(out, row.relativeVelocityRtnMPerS[0], 4),
  }),
  bulkColumn({
    name: 'relative_velocity_t_m_s',
    unit: 'm/s',
    meaning: 'The same, transverse component',
    put: (out, row) => putFixed(out, row.relativeVelocityRtnMPerS[1], 4),
  }),
  bulkColumn({
    name: 'relative_velocity_n_m_s',
    unit: 'm/s',
    meaning: 'The same, normal component',
    put: (out, row) => putFixed(out, row.relativeVelocityRtnMPerS[2], 4),
  }),
  bulkColumn({
    name: 'collision_probability',
    unit: '0 to 1',
    meaning:
      'Probability of collision in this encounter by the method named beside it, six significant digits; ' +
      'empty where no figure can be given',
    put: (out, row) => putExponent(out, row.collisionProbability),
  }),
  bulkColumn({
    name: 'collision_probability_method',
    unit: '',
    meaning: 'Method of collision_probability, in the words of CCSDS 508.0-B-1 where it has one',
    put: (out, row) => putOneOfFew(out, row.collisionProbabilityMethod),
  }),
  bulkColumn({
    name: 'collision_probability_max',
    unit: '0 to 1',
    meaning:
      'The highest probability that any common scaling of the two covariances gives at this miss distance, ' +
      'six significant digits',
    put: (out, row) => putExponent(out, row.collisionProbabilityMax),
  }),
  bulkColumn({
    name: 'mahalanobis_distance',
    unit: '',
    meaning: 'Miss distance in sigmas of the combined covariance in the encounter plane, 4 decimals',
    put: (out, row) => putFixed(out, row.mahalanobisDistance, 4),
  }),
  bulkColumn({
    name: 'hard_body_radius_m',
    unit: 'm',
    meaning: 'Sum of the radii of the two objects, 3 decimals',
    put: (out, row) => putFixed(out, row.hardBodyRadiusM, 3),
  }),
  bulkColumn({
    name: 'object1_sigma_r_m',
    unit: 'm',
    meaning:
      'One-sigma position uncertainty of object 1 at closest approach, radial in its own RTN frame, 3 decimals',
    put: (out, row) => putFixed(out, row.object1.sigmaRtnM[0], 3),
  }),
  bulkColumn({
    name: 'object1_sigma_t_m',
    unit: 'm',
    meaning: 'The same, transverse',
    put: (out, row) => putFixed(out, row.object1.sigmaRtnM[1], 3),
  }),
  bulkColumn({
    name: 'object1_sigma_n_m',
    unit: 'm',
    meaning: 'The same, normal',
    put: (out, row) => putFixed(out, row.object1.sigmaRtnM[2], 3),
  }),
  bulkColumn({
    name: 'object2_sigma_r_m',
    unit: 'm',
    meaning:
      'One-sigma position uncertainty of object 2 at closest approach, radial in its own RTN frame, 3 decimals',
    put: (out, row) => putFixed(out, row.object2.sigmaRtnM[0], 3),
  }),
  bulkColumn({
    name: 'object2_sigma_t_m',
    unit: 'm',
    meaning: 'The same, transverse',
    put: (out, row) => putFixed(out, row.object2.sigmaRtnM[1], 3),
  }),
  bulkColumn({
    name: 'object2_sigma_n_m',
    unit: 'm',
    meaning: 'The same, normal',
    put: (out, row) => putFixed(out, row.object2.sigmaRtnM[2], 3),
  }),
  bulkColumn({
    name: 'object1_element_age_d',
    unit: 'd',
    meaning:
      'Age of the elements of object 1 at closest approach, negative when their epoch lies after it, 4 decimals',
    put: (out, row) => putFixed(out, row.object1.elementAgeDays, 4),
  }),
  bulkColumn({
    name: 'object2_element_age_d',
    unit: 'd',
    meaning: 'The same for object 2',
    put: (out, row) => putFixed(out, row.object2.elementAgeDays, 4),
  }),
  DOUBTS_COLUMN,
  CAUTION_COLUMN,
  bulkColumn({
    name: 'collision_probability_foster',
    unit: '0 to 1',
    meaning:
      "Foster's two-dimensional probability, also where another method gives collision_probability, " +
      'six significant digits',
    put: (out, row) => putExponent(out, row.collisionProbabilityFoster),
  }),
  bulkColumn({
    name: 'pair_probability',
    unit: '0 to 1',
    meaning:
      'Probability of at least one collision over all encounters of this pair in the window, taken as independent, which errs on the high side; six significant digits',
    put: (out, row) => putExponent(out, row.pairProbability),
  }),
  bulkColumn({
    name: 'screen_entry_utc',
    unit: 'UTC',
    meaning: 'When object 2 enters the screening volume around object 1; empty where no volume was asked for',
    put: (out, row) => putUtc(out, row.screenEntryMs),
  }),
  bulkColumn({
    name: 'screen_exit_utc',
    unit: 'UTC',
    meaning: 'When object 2 leaves the screening volume; empty where no volume was asked for',
    put: (out, row) => putUtc(out, row.screenExitMs),
  }),
];
