import { json2satrec, type SatRec } from 'satellite.js';
import type { ElementSet } from './element-set.js';
import { formatUtc } from './utc.js';

const MS_PER_DAY = 86_400_000;
const JULIAN_DATE_OF_UNIX_EPOCH = 2_440_587.5;

/**
 * Initialises SGP4 (WGS-72, improved mode) for one element set.
 *
 * satellite.js rounds the epoch of an OMM record to a millisecond; inside SGP4 that touches only the
 * slow lunar-solar and resonance terms of deep-space orbits. `jdsatepoch` is set from the unrounded
 * epoch, and exact work counts minutes from `epochMs` instead of using a Julian date at all.
 *
 * @returns the record; `error` is not 0 when SGP4 rejects the elements.
 */
export function sgp4RecordOf(
  set: Pick<
    ElementSet,
    | 'epochMs'
    | 'meanMotionRevPerDay'
    | 'eccentricity'
    | 'inclinationDeg'
    | 'rightAscensionDeg'
    | 'argumentOfPerigeeDeg'
    | 'meanAnomalyDeg'
    | 'bstar'
  >,
): SatRec {
  const record = json2satrec({
    OBJECT_NAME: '',
    OBJECT_ID: '',
    EPOCH: formatUtc(set.epochMs),
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
  record.jdsatepoch = JULIAN_DATE_OF_UNIX_EPOCH + set.epochMs / MS_PER_DAY;
  return record;
}
