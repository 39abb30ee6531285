import { type SatRec, SatRecError } from 'satellite.js';
import { EARTH_J2 } from './gravity.js';

/** Numbers of one set of secular elements. */
export const SECULAR_SIZE = 5;
/** Places in it: semi-major axis (Earth radii), eccentricity vector along and across the node, argument of latitude, node. */
export const AXIS = 0;
export const E_ALONG_NODE = 1;
export const E_ACROSS_NODE = 2;
export const LATITUDE = 3;
export const NODE = 4;

/** Where the drag of SGP4 is past what this reading of it is for. */
const LEAST_TEMPA = 0.5;
const MOST_ECCENTRICITY = 0.5;

/** Constants of SGP4 that the secular elements hang on, in the order of `TERMS`: one line of memory after the other. */
const TERMS = [
  'mo',
  'mdot',
  'argpo',
  'argpdot',
  'nodeo',
  'nodedot',
  'nodecf',
  'cc1',
  't2cof',
  'no',
  'ecco',
  'a',
  'aycof',
  'xlcof',
  'bstar',
  'cc4',
  'omgcof',
  'xmcof',
  'eta',
  'delmo',
  'd2',
  'd3',
  'd4',
  'cc5',
  'sinmao',
  't3cof',
  't4cof',
  't5cof',
  'isimp',
  'inclo',
] as const satisfies readonly (keyof SatRec)[];

export const TERMS_SIZE = TERMS.length;
/** Place of the inclination among the terms. */
export const INCLINATION = TERMS.indexOf('inclo');

/** Whether SGP4 treats the orbit as near-earth: without the lunar-solar terms that are not in these formulas. */
export function isNearEarth(record: SatRec): boolean {
  return record.method === 'n' && record.error === SatRecError.None;
}

/** Copies what the secular elements of a near-earth orbit hang on. */
export function laySecularTerms(record: SatRec, terms: Float64Array, at: number): void {
  for (let k = 0; k < TERMS_SIZE; k++) terms[at + k] = record[TERMS[k]];
}

/**
 * Mean elements of a near-earth orbit at one time as SGP4 has them before its short periods: secular gravity
 * and drag, and the long periods of J3 (F. R. Hoots and R. L. Roehrich, Spacetrack Report #3, 1980, section 6;
 * D. A. Vallado et al., "Revisiting Spacetrack Report #3", AIAA 2006-6753). Angles are not brought into one
 * turn, so that they run on smoothly.
 *
 * @param terms of the orbit, from `at` on
 * @param minutes since its epoch
 * @param out `SECULAR_SIZE` numbers: Earth radii and radians
 * @returns false where drag has changed the orbit beyond what the formulas are good for
 */
export function secularElementsAt(
  terms: Float64Array,
  at: number,
  minutes: number,
  out: Float64Array,
): boolean {
  const t = minutes;
  const t2 = t * t;
  const anomaly = terms[at] + terms[at + 1] * t;
  let perigee = terms[at + 2] + terms[at + 3] * t;
  let latitude = anomaly + perigee;
  const bstar = terms[at + 14];
  let tempa = 1 - terms[at + 7] * t;
  let tempe = bstar * terms[at + 15] * t;
  let templ = terms[at + 8] * t2;
  const isSimple = terms[at + 28] === 1;
  if (!isSimple) {
    const t3 = t2 * t;
    const t4 = t3 * t;
    const swing = 1 + terms[at + 18] * Math.cos(anomaly);
    // Drag moves the anomaly and the perigee against each other: their sum stays.
    const shift = terms[at + 16] * t + terms[at + 17] * (swing * swing * swing - terms[at + 19]);
    perigee -= shift;
    tempa -= terms[at + 20] * t2 + terms[at + 21] * t3 + terms[at + 22] * t4;
    tempe += bstar * terms[at + 23] * (Math.sin(anomaly + shift) - terms[at + 24]);
    templ += terms[at + 25] * t3 + t4 * (terms[at + 26] + t * terms[at + 27]);
  }
  const unbound = terms[at + 10] - tempe;
  const eccentricity = Math.max(1e-6, unbound);
  if (!(tempa > LEAST_TEMPA && eccentricity < MOST_ECCENTRICITY && unbound > -1e-3)) return false;
  latitude += terms[at + 9] * templ;
  const axis = terms[at + 11] * tempa * tempa;
  const perParameter = 1 / (axis * (1 - eccentricity * eccentricity));
  const along = eccentricity * Math.cos(perigee);
  out[AXIS] = axis;
  out[E_ALONG_NODE] = along;
  out[E_ACROSS_NODE] = eccentricity * Math.sin(perigee) + perParameter * terms[at + 12];
  out[LATITUDE] = latitude + perParameter * terms[at + 13] * along;
  out[NODE] = terms[at + 4] + terms[at + 5] * t + terms[at + 6] * t2;
  return true;
}

/** Largest swings within a revolution of what drag does to the eccentricity vector: not seen in single times. */
export function dragSwing(terms: Float64Array, at: number): number {
  if (terms[at + 28] === 1) return 0;
  const eta = terms[at + 18];
  const shift = Math.abs(terms[at + 17]) * ((1 + eta) ** 3 - (1 - eta) ** 3);
  return terms[at + 10] * shift + 2 * Math.abs(terms[at + 14] * terms[at + 23]);
}

/** What SGP4's short periods (J2 alone) move a position by at most, and the constant part of them. */
export type ShortPeriods = {
  /** The radius of the mean ellipse is multiplied by this. */
  readonly radiusFactor: number;
  /** Largest distance from there, Earth radii. */
  readonly swing: number;
};

/**
 * Bound on SGP4's short periods: the amplitudes of its own terms in radius, argument of latitude, node and
 * inclination, added up.
 *
 * @param cosine, sine of the inclination
 * @param axis mean, Earth radii
 */
export function shortPeriodsOf(
  cosine: number,
  sine: number,
  axis: number,
  eccentricity: number,
): ShortPeriods {
  const parameter = axis * (1 - eccentricity * eccentricity);
  const perParameter = (0.5 * EARTH_J2) / parameter;
  const perParameter2 = perParameter / parameter;
  const farthest = axis * (1 + eccentricity) * 1.002;
  const latitude = 0.25 * Math.abs(7 * cosine * cosine - 1);
  const plane = 1.5 * Math.abs(cosine) * (1 + sine);
  return {
    radiusFactor:
      1 - 1.5 * perParameter2 * Math.sqrt(1 - eccentricity * eccentricity) * (3 * cosine * cosine - 1),
    swing: farthest * perParameter2 * (latitude + plane) + 0.5 * perParameter * sine * sine,
  };
}
