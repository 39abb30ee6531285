import { EARTH_MU_KM3_PER_S2, EARTH_RADIUS_KM } from './gravity.js';
import {
  AXIS,
  dragSwing,
  E_ACROSS_NODE,
  E_ALONG_NODE,
  INCLINATION,
  LATITUDE,
  NODE,
  SECULAR_SIZE,
  secularElementsAt,
  shortPeriodsOf,
  TERMS_SIZE,
} from './secular-elements.js';

/**
 * Ellipses that turn evenly, one for each object, which stand for SGP4 over a short span: cheap to reason
 * about, and within `toleranceKm` of SGP4's positions. All arrays are by object; times are seconds from the
 * middle of the span; angles radians; the argument of latitude counts from the ascending node.
 */
export type MeanOrbits = {
  readonly axisKm: Float64Array;
  /** Eccentricity vector, along the node and across it, in the middle and its rate. */
  readonly eAlong: Float64Array;
  readonly eAcross: Float64Array;
  readonly eAlongRate: Float64Array;
  readonly eAcrossRate: Float64Array;
  readonly eccentricity: Float64Array;
  /** Mean argument of latitude. */
  readonly latitude: Float64Array;
  readonly latitudeRate: Float64Array;
  readonly node: Float64Array;
  readonly nodeRate: Float64Array;
  readonly cosInclination: Float64Array;
  readonly sinInclination: Float64Array;
  /** What J2 makes of the radius of the ellipse throughout. */
  readonly radiusFactor: Float64Array;
  /** Radii that SGP4 stays between. */
  readonly lowKm: Float64Array;
  readonly highKm: Float64Array;
  /** Largest distance of SGP4 from the ellipse. */
  readonly toleranceKm: Float64Array;
};

/** An object with more than this is left to other means: the formulas take e for small. */
export const MOST_ECCENTRICITY = 0.1;
/** Second order of the short periods, and rounding. */
const SLACK_KM = 0.3;
/** The elements bend evenly over hours; what they leave the straight line by at the ends holds, with so much room. */
const BEND_ROOM = 1.5;
const MINUTE_MS = 60_000;

export function createMeanOrbits(count: number): MeanOrbits {
  const array = () => new Float64Array(count);
  return {
    axisKm: array(),
    eAlong: array(),
    eAcross: array(),
    eAlongRate: array(),
    eAcrossRate: array(),
    eccentricity: array(),
    latitude: array(),
    latitudeRate: array(),
    node: array(),
    nodeRate: array(),
    cosInclination: array(),
    sinInclination: array(),
    radiusFactor: array(),
    lowKm: array(),
    highKm: array(),
    toleranceKm: array(),
  };
}

const start = new Float64Array(SECULAR_SIZE);
const middle = new Float64Array(SECULAR_SIZE);
const end = new Float64Array(SECULAR_SIZE);

/**
 * Lays the ellipse of one object.
 *
 * @param place of the object in `orbits`
 * @param terms secular terms of all near-earth objects, those of `object` at `TERMS_SIZE` times that
 * @returns false where no ellipse stands for the object: it is too eccentric, or its drag past what the formulas hold
 */
export function layMeanOrbit(
  orbits: MeanOrbits,
  place: number,
  terms: Float64Array,
  object: number,
  epochMs: number,
  middleMs: number,
  halfSpanS: number,
): boolean {
  const at = TERMS_SIZE * object;
  const minutes = (middleMs - epochMs) / MINUTE_MS;
  const halfMinutes = halfSpanS / 60;
  if (!secularElementsAt(terms, at, minutes - halfMinutes, start)) return false;
  if (!secularElementsAt(terms, at, minutes, middle)) return false;
  if (!secularElementsAt(terms, at, minutes + halfMinutes, end)) return false;
  const swing = dragSwing(terms, at);
  const eccentricity =
    Math.max(sizeOf(start), sizeOf(middle), sizeOf(end)) + bend(E_ALONG_NODE) + bend(E_ACROSS_NODE) + swing;
  if (!(eccentricity <= MOST_ECCENTRICITY)) return false;
  const inclination = terms[at + INCLINATION];
  const cosInclination = Math.cos(inclination);
  const sinInclination = Math.sin(inclination);
  const periods = shortPeriodsOf(cosInclination, sinInclination, middle[AXIS], eccentricity);
  const axisKm = middle[AXIS] * EARTH_RADIUS_KM;
  const axisSwing = Math.abs(end[AXIS] - start[AXIS]) / 2 + bend(AXIS);
  const farthest = middle[AXIS] * (1 + eccentricity);
  // The radius moves by a |de|, the place along the path by 2 a |de|.
  const bent =
    axisSwing +
    farthest * (bend(LATITUDE) + bend(NODE)) +
    2.5 * middle[AXIS] * (bend(E_ALONG_NODE) + bend(E_ACROSS_NODE) + swing);
  const toleranceKm = EARTH_RADIUS_KM * (periods.swing + bent) + SLACK_KM;
  const lowKm = axisKm * (1 - eccentricity) * periods.radiusFactor - toleranceKm;
  orbits.axisKm[place] = axisKm;
  orbits.eAlong[place] = middle[E_ALONG_NODE];
  orbits.eAcross[place] = middle[E_ACROSS_NODE];
  orbits.eAlongRate[place] = rate(E_ALONG_NODE, halfSpanS);
  orbits.eAcrossRate[place] = rate(E_ACROSS_NODE, halfSpanS);
  orbits.eccentricity[place] = eccentricity;
  orbits.latitude[place] = middle[LATITUDE];
  orbits.latitudeRate[place] = rate(LATITUDE, halfSpanS);
  orbits.node[place] = middle[NODE];
  orbits.nodeRate[place] = rate(NODE, halfSpanS);
  orbits.cosInclination[place] = cosInclination;
  orbits.sinInclination[place] = sinInclination;
  orbits.radiusFactor[place] = periods.radiusFactor;
  orbits.lowKm[place] = lowKm;
  orbits.highKm[place] = axisKm * (1 + eccentricity) * periods.radiusFactor + toleranceKm;
  orbits.toleranceKm[place] = toleranceKm;
  return true;
}

/** Rate of an element over the span. */
function rate(place: number, halfSpanS: number): number {
  return (end[place] - start[place]) / (2 * halfSpanS);
}

function sizeOf(elements: Float64Array): number {
  return Math.sqrt(elements[E_ALONG_NODE] ** 2 + elements[E_ACROSS_NODE] ** 2);
}

/** What an element leaves the straight line through its middle by, at the ends. */
function bend(place: number): number {
  return BEND_ROOM * Math.abs((start[place] + end[place]) / 2 - middle[place]);
}

/**
 * State on the ellipse: the velocity is the derivative of the position but for the turn of the eccentricity
 * vector (see `unevenKmPerS`).
 *
 * @param timeS seconds from the middle of the span
 * @param out x, y, z (km) and vx, vy, vz (km/s), TEME, from `offset` on
 */
export function stateOnMeanOrbit(
  orbits: MeanOrbits,
  object: number,
  timeS: number,
  out: Float64Array,
  offset: number,
): void {
  const rate = orbits.latitudeRate[object];
  const along = orbits.eAlong[object] + orbits.eAlongRate[object] * timeS;
  const across = orbits.eAcross[object] + orbits.eAcrossRate[object] * timeS;
  const u = orbits.latitude[object] + rate * timeS;
  // Kepler's equation in u: with e up to 0.1, two steps of Newton from the first order err by e^8.
  let f = u;
  let sine = Math.sin(f);
  let cosine = Math.cos(f);
  f += along * sine - across * cosine;
  for (let step = 0; step < 2; step++) {
    sine = Math.sin(f);
    cosine = Math.cos(f);
    f += (u - f + along * sine - across * cosine) / (1 - along * cosine - across * sine);
  }
  sine = Math.sin(f);
  cosine = Math.cos(f);
  const eSine = along * sine - across * cosine;
  const beta = Math.sqrt(1 - along * along - across * across);
  const share = eSine / (1 + beta);
  const size = 1 - along * cosine - across * sine;
  const sinLatitude = (sine - across - along * share) / size;
  const cosLatitude = (cosine - along + across * share) / size;
  const scaleKm = orbits.axisKm[object] * orbits.radiusFactor[object];
  const radius = scaleKm * size;
  const upward = (scaleKm * rate * eSine) / size;
  const onward = (scaleKm * rate * beta) / size;
  const nodeRate = orbits.nodeRate[object];
  const node = orbits.node[object] + nodeRate * timeS;
  const sinNode = Math.sin(node);
  const cosNode = Math.cos(node);
  const cosI = orbits.cosInclination[object];
  const ux = cosNode * cosLatitude - sinNode * cosI * sinLatitude;
  const uy = sinNode * cosLatitude + cosNode * cosI * sinLatitude;
  const uz = orbits.sinInclination[object] * sinLatitude;
  const vx = -cosNode * sinLatitude - sinNode * cosI * cosLatitude;
  const vy = -sinNode * sinLatitude + cosNode * cosI * cosLatitude;
  const vz = orbits.sinInclination[object] * cosLatitude;
  out[offset] = radius * ux;
  out[offset + 1] = radius * uy;
  out[offset + 2] = radius * uz;
  out[offset + 3] = upward * ux + onward * vx - nodeRate * radius * uy;
  out[offset + 4] = upward * uy + onward * vy + nodeRate * radius * ux;
  out[offset + 5] = upward * uz + onward * vz;
}

/** What the velocity of `stateOnMeanOrbit` leaves out: the turn of the eccentricity vector. */
export function unevenKmPerS(orbits: MeanOrbits, object: number): number {
  return (
    2.5 * orbits.axisKm[object] * Math.hypot(orbits.eAlongRate[object], orbits.eAcrossRate[object]) + 1e-5
  );
}

/** By how much the ellipse's acceleration may differ from gravity's at the same place, km/s^2: by what J2 does, and the turn of the node. */
export function unevenKmPerS2(orbits: MeanOrbits, object: number): number {
  const axisKm = orbits.axisKm[object] * (1 - orbits.eccentricity[object]);
  return (6e-3 * EARTH_MU_KM3_PER_S2) / (axisKm * axisKm) + 16 * Math.abs(orbits.nodeRate[object]);
}
