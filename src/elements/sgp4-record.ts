import { json2satrec, type SatRec } from 'satellite.js';
import type { ElementSet } from './element-set.js';
import { formatUtc } from './utc.js';

const MS_PER_DAY = 86_400_000;
const JULIAN_DATE_OF_UNIX_EPOCH = 2_440_587.5;
/** 1/128 day: a Julian date in steps of it has no rounding error. */
const STEP_MS = 675_000;
/** SGP4 is deep-space from a period of 225 minutes on, 6.4 revolutions a day of its own mean motion. */
const SURELY_NEAR_EARTH_REV_PER_DAY = 7;

/** The part of an element set that SGP4 works from. */
export type MeanElements = Pick<
  ElementSet,
  | 'epochMs'
  | 'meanMotionRevPerDay'
  | 'eccentricity'
  | 'inclinationDeg'
  | 'rightAscensionDeg'
  | 'argumentOfPerigeeDeg'
  | 'meanAnomalyDeg'
  | 'bstar'
>;

/**
 * Initializes SGP4 (WGS-72, improved mode) for one element set.
 *
 * satellite.js takes an epoch only to the millisecond. Near-earth orbits do not care, but the lunar-solar
 * and resonance constants of deep-space orbits hang on it: up to 35 mm over the published verification
 * sets. Sidereal angle and mean lunar-solar angles run linearly over minutes, so these constants are
 * interpolated between two epochs 1/128 day apart. `jdsatepoch` is set from the unrounded epoch; exact work
 * counts minutes from `epochMs` instead of using a Julian date at all.
 *
 * @param set finite numbers only
 * @returns the record; `error` is not 0 when SGP4 rejects the elements.
 */
export function sgp4RecordOf(set: MeanElements): SatRec {
  if (set.meanMotionRevPerDay < SURELY_NEAR_EARTH_REV_PER_DAY && !Number.isInteger(set.epochMs)) {
    const beforeMs = Math.floor(set.epochMs / STEP_MS) * STEP_MS;
    const record = recordAt(set, beforeMs);
    if (record.method === 'd') {
      const { error, epochdays } = record;
      const fraction = (set.epochMs - beforeMs) / STEP_MS;
      interpolate(record, recordAt(set, beforeMs + STEP_MS), fraction);
      record.error = error;
      record.epochdays = epochdays + (fraction * STEP_MS) / MS_PER_DAY;
      return withEpoch(record, set.epochMs);
    }
  }
  return roundedSgp4RecordOf(set);
}

/**
 * Initializes SGP4 as `sgp4RecordOf` does, but with the epoch of deep-space constants rounded to a
 * millisecond: in half the time, for a check of the elements.
 */
export function roundedSgp4RecordOf(set: MeanElements): SatRec {
  return withEpoch(recordAt(set, set.epochMs), set.epochMs);
}

function withEpoch(record: SatRec, epochMs: number): SatRec {
  record.jdsatepoch = JULIAN_DATE_OF_UNIX_EPOCH + epochMs / MS_PER_DAY;
  return record;
}

function recordAt(set: MeanElements, epochMs: number): SatRec {
  return json2satrec({
    OBJECT_NAME: '',
    OBJECT_ID: '',
    EPOCH: formatUtc(epochMs),
    MEAN_MOTION: set.meanMotionRevPerDay,
    ECCENTRICITY: set.eccentricity,
    INCLINATION: set.inclinationDeg,
    RA_OF_ASC_NODE: set.rightAscensionDeg,
    ARG_OF_PERICENTER: set.argumentOfPerigeeDeg,
    MEAN_ANOMALY: set.meanAnomalyDeg,
    EPHEMERIS_TYPE: 0,
    CLASSIFICATION_TYPE: 'U',
    NORAD_CAT_ID: 0,
    ELEMENT_SET_NO: 0,
    REV_AT_EPOCH: 0,
    BSTAR: set.bstar,
    MEAN_MOTION_DOT: 0,
    MEAN_MOTION_DDOT: 0,
  });
}

function interpolate(record: SatRec, next: SatRec, fraction: number): void {
  const fields = record as unknown as Record<string, number | string | undefined>;
  for (const [key, after] of Object.entries(next)) {
    const before = fields[key];
    // What does not change is not written either: V8 would recompile all of SGP4 for it, three times slower.
    if (before === after || typeof before !== 'number' || typeof after !== 'number') continue;
    const step = after - before;
    // Angles are kept in one turn: the short way round is the way the angle went.
    fields[key] = before + fraction * (step - 2 * Math.PI * Math.round(step / (2 * Math.PI)));
  }
}
