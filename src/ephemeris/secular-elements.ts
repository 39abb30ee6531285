import { EARTH_J2 } from './gravity.js';
import { integerPlaceOf, isDeepSpace, placeOf, type Sgp4Records } from './sgp4-records.js';

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

/**
 * Constants of SGP4 that the secular elements hang on, each at its place, so that
 * those of one orbit lie together in memory.
 */
const AT = {
  mo: 0,
  mdot: 1,
  argpo: 2,
  argpdot: 3,
  nodeo: 4,
  nodedot: 5,
  nodecf: 6,
  cc1: 7,
  t2cof: 8,
  no: 9,
  ecco: 10,
  a: 11,
  aycof: 12,
  xlcof: 13,
  bstar: 14,
  cc4: 15,
  omgcof: 16,
  xmcof: 17,
  eta: 18,
  delmo: 19,
  d2: 20,
  d3: 21,
  d4: 22,
  cc5: 23,
  sinmao: 24,
  t3cof: 25,
  t4cof: 26,
  t5cof: 27,
  isimp: 28,
  inclo: 29,
} as const;

export const TERMS_SIZE = Object.keys(AT).length;
/** Place of the inclination among the terms. */
export const INCLINATION = AT.inclo;

/** Whether there are terms of an orbit: there are none of deep-space ones. */
export function hasSecularTerms(terms: Float64Array, at: number): boolean {
  return !Number.isNaN(terms[at]);
}

/** Where the terms lie in a record; the whole number among them is copied by itself. */
type TermPlaces = { readonly from: Int32Array; readonly to: Int32Array; readonly isSimple: number };

let places: TermPlaces | undefined;

function termPlaces(): TermPlaces {
  const doubles = Object.entries(AT).filter(([name]) => name !== 'isimp');
  return {
    // satellite.js's module has two motions: this is the Brouwer one.
    from: Int32Array.from(doubles, ([name]) => placeOf(name === 'no' ? 'no_unkozai' : name)),
    to: Int32Array.from(doubles, ([, at]) => at),
    isSimple: integerPlaceOf('isimp'),
  };
}

/** Copies what the secular elements of an orbit hang on; `NaN` where it is deep-space. */
export function laySecularTerms(records: Sgp4Records, place: number, terms: Float64Array, at: number): void {
  if (isDeepSpace(records, place)) {
    terms[at] = Number.NaN;
    return;
  }
  places ??= termPlaces();
  const { from, to, isSimple } = places;
  const record = records.size * place;
  for (let k = 0; k < from.length; k++) terms[at + to[k]] = records.values[record + from[k]];
  terms[at + AT.isimp] = records.integers[2 * record + isSimple];
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
  const anomaly = terms[at + AT.mo] + terms[at + AT.mdot] * t;
  let perigee = terms[at + AT.argpo] + terms[at + AT.argpdot] * t;
  let latitude = anomaly + perigee;
  const bstar = terms[at + AT.bstar];
  let tempa = 1 - terms[at + AT.cc1] * t;
  let tempe = bstar * terms[at + AT.cc4] * t;
  let templ = terms[at + AT.t2cof] * t2;
  const isSimple = terms[at + AT.isimp] === 1;
  if (!isSimple) {
    const t3 = t2 * t;
    const t4 = t3 * t;
    const swing = 1 + terms[at + AT.eta] * Math.cos(anomaly);
    // Drag moves the anomaly and the perigee against each other: their sum stays.
    const shift =
      terms[at + AT.omgcof] * t + terms[at + AT.xmcof] * (swing * swing * swing - terms[at + AT.delmo]);
    perigee -= shift;
    tempa -= terms[at + AT.d2] * t2 + terms[at + AT.d3] * t3 + terms[at + AT.d4] * t4;
    tempe += bstar * terms[at + AT.cc5] * (Math.sin(anomaly + shift) - terms[at + AT.sinmao]);
    templ += terms[at + AT.t3cof] * t3 + t4 * (terms[at + AT.t4cof] + t * terms[at + AT.t5cof]);
  }
  const unbound = terms[at + AT.ecco] - tempe;
  const eccentricity = Math.max(1e-6, unbound);
  if (!(tempa > LEAST_TEMPA && eccentricity < MOST_ECCENTRICITY && unbound > -1e-3)) return false;
  latitude += terms[at + AT.no] * templ;
  const axis = terms[at + AT.a] * tempa * tempa;
  const perParameter = 1 / (axis * (1 - eccentricity * eccentricity));
  const along = eccentricity * Math.cos(perigee);
  out[AXIS] = axis;
  out[E_ALONG_NODE] = along;
  out[E_ACROSS_NODE] = eccentricity * Math.sin(perigee) + perParameter * terms[at + AT.aycof];
  out[LATITUDE] = latitude + perParameter * terms[at + AT.xlcof] * along;
  out[NODE] = terms[at + AT.nodeo] + terms[at + AT.nodedot] * t + terms[at + AT.nodecf] * t2;
  return true;
}

/** Largest swings within a revolution of what drag does to the eccentricity vector: not seen in single times. */
export function dragSwing(terms: Float64Array, at: number): number {
  if (terms[at + AT.isimp] === 1) return 0;
  const eta = terms[at + AT.eta];
  const shift = Math.abs(terms[at + AT.xmcof]) * ((1 + eta) ** 3 - (1 - eta) ** 3);
  return terms[at + AT.ecco] * shift + 2 * Math.abs(terms[at + AT.bstar] * terms[at + AT.cc5]);
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
