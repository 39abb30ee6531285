import type { ElementSet } from '../../src/elements/element-set.js';

const COLUMNS = [
  'OBJECT_NAME',
  'OBJECT_ID',
  'EPOCH',
  'MEAN_MOTION',
  'ECCENTRICITY',
  'INCLINATION',
  'RA_OF_ASC_NODE',
  'ARG_OF_PERICENTER',
  'MEAN_ANOMALY',
  'EPHEMERIS_TYPE',
  'CLASSIFICATION_TYPE',
  'NORAD_CAT_ID',
  'ELEMENT_SET_NO',
  'REV_AT_EPOCH',
  'BSTAR',
  'MEAN_MOTION_DOT',
  'MEAN_MOTION_DDOT',
] as const;

/** An element set as an orbit mean-elements message (CCSDS 502.0-B-3): two lines hold no number past 339 999. */
export function toOmm(set: ElementSet) {
  return {
    OBJECT_NAME: set.name,
    OBJECT_ID: set.internationalDesignator,
    EPOCH: new Date(Math.round(set.epochMs)).toISOString().replace('Z', ''),
    MEAN_MOTION: set.meanMotionRevPerDay,
    ECCENTRICITY: set.eccentricity,
    INCLINATION: set.inclinationDeg,
    RA_OF_ASC_NODE: set.rightAscensionDeg,
    ARG_OF_PERICENTER: set.argumentOfPerigeeDeg,
    MEAN_ANOMALY: set.meanAnomalyDeg,
    EPHEMERIS_TYPE: 0,
    CLASSIFICATION_TYPE: 'U',
    NORAD_CAT_ID: Number(set.designator),
    ELEMENT_SET_NO: 999,
    REV_AT_EPOCH: 1,
    BSTAR: set.bstar,
    MEAN_MOTION_DOT: 0,
    MEAN_MOTION_DDOT: 0,
  } as const;
}

/** Element sets as an OMM file in CSV. */
export function toOmmCsv(sets: readonly ElementSet[]): string {
  const lines = sets.map((set) => {
    const record = toOmm(set);
    return COLUMNS.map((column) => record[column]).join(',');
  });
  return `${[COLUMNS.join(','), ...lines].join('\n')}\n`;
}
