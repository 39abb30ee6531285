import KDBush from 'kdbush';
import { EARTH_RADIUS_KM } from '../elements/orbit.js';
import { MEAN_AXIS, MEAN_ECCENTRICITY, recordMeansAt } from '../ephemeris/record-states.js';
import {
  AXIS,
  E_ACROSS_NODE,
  E_ALONG_NODE,
  hasSecularTerms,
  laySecularTerms,
  SECULAR_SIZE,
  secularElementsAt,
  TERMS_SIZE,
} from '../ephemeris/secular-elements.js';
import { isDeepSpace, type PlacedRecord, recordNumber } from '../ephemeris/sgp4-records.js';

/** Distances from the Earth's center between which an object stays during a window, km. */
export type RadiusBand = { readonly lowKm: number; readonly highKm: number };

const MS_PER_MINUTE = 60_000;
/** Mean elements are looked at this often; in between they drift by less than the pads. */
const LONGEST_GAP_MS = 4 * 86_400_000;
/**
 * What J2 and J3 swing the radius about the mean ellipse: short periods up to 6 km, the long-period term of
 * J3 up to 9 km. Twice that, and for deep-space orbits room for the lunar-solar terms.
 */
const NEAR_EARTH_PAD_KM = 30;
const DEEP_SPACE_PAD_KM = 200;
/** Above this SGP4 does not fail on a near-earth orbit. */
const LOWEST_SURE_KM = EARTH_RADIUS_KM + 50;

const ownTerms = new Float64Array(TERMS_SIZE);
const secular = new Float64Array(SECULAR_SIZE);
const means = new Float64Array(4);

/**
 * The band of one object: from the mean semi-major axis and eccentricity that SGP4 gives along the window.
 *
 * @returns `undefined` where SGP4 gives no state at one of the times: such an object is not sieved
 */
export function radiusBand(
  object: PlacedRecord,
  epochMs: number,
  startMs: number,
  endMs: number,
): RadiusBand | undefined {
  laySecularTerms(object.records, object.place, ownTerms, 0);
  return nearEarthBand(ownTerms, 0, epochMs, startMs, endMs) ?? bandOfMeans(object, startMs, endMs);
}

/**
 * The same by the secular elements alone, a tenth of the work: for orbits that stay well above the ground.
 *
 * @param terms as `laySecularTerms` lays them, from `at` on
 * @returns `undefined` for other orbits
 */
export function nearEarthBand(
  terms: Float64Array,
  at: number,
  epochMs: number,
  startMs: number,
  endMs: number,
): RadiusBand | undefined {
  if (!hasSecularTerms(terms, at)) return undefined;
  const band = { lowKm: Number.POSITIVE_INFINITY, highKm: 0 };
  for (const timeMs of timesBetween(startMs, endMs)) {
    if (!secularElementsAt(terms, at, (timeMs - epochMs) / MS_PER_MINUTE, secular)) return undefined;
    const along = secular[E_ALONG_NODE];
    const across = secular[E_ACROSS_NODE];
    widen(band, secular[AXIS], Math.sqrt(along * along + across * across));
  }
  const padded = { lowKm: band.lowKm - NEAR_EARTH_PAD_KM, highKm: band.highKm + NEAR_EARTH_PAD_KM };
  return padded.lowKm > LOWEST_SURE_KM ? padded : undefined;
}

function bandOfMeans(
  { records, place }: PlacedRecord,
  startMs: number,
  endMs: number,
): RadiusBand | undefined {
  const band = { lowKm: Number.POSITIVE_INFINITY, highKm: 0 };
  for (const timeMs of timesBetween(startMs, endMs)) {
    if (!recordMeansAt(records, place, timeMs, means)) return undefined;
    widen(band, means[MEAN_AXIS], means[MEAN_ECCENTRICITY]);
  }
  const padKm = isDeepSpace(records, place) ? DEEP_SPACE_PAD_KM : NEAR_EARTH_PAD_KM;
  return { lowKm: band.lowKm - padKm, highKm: band.highKm + padKm };
}

function timesBetween(startMs: number, endMs: number): number[] {
  const gaps = Math.max(1, Math.ceil((endMs - startMs) / LONGEST_GAP_MS));
  return Array.from({ length: gaps + 1 }, (_, k) => startMs + ((endMs - startMs) * k) / gaps);
}

/** @param axis semi-major axis, Earth radii */
function widen(band: { lowKm: number; highKm: number }, axis: number, eccentricity: number): void {
  band.lowKm = Math.min(band.lowKm, axis * (1 - eccentricity) * EARTH_RADIUS_KM);
  band.highKm = Math.max(band.highKm, axis * (1 + eccentricity) * EARTH_RADIUS_KM);
}

/** The band of an object that is nowhere. */
const NOWHERE: RadiusBand = { lowKm: Number.POSITIVE_INFINITY, highKm: Number.NEGATIVE_INFINITY };

/**
 * The band that others are sieved by: as `radiusBand`, but an object that SGP4 gives up on from the start of
 * the window is nowhere, since it counts as gone from then on, and one that its drag brings down in the window
 * only sinks.
 *
 * @returns `undefined` where the object may be anywhere
 */
export function primaryBand(
  object: PlacedRecord,
  epochMs: number,
  startMs: number,
  endMs: number,
): RadiusBand | undefined {
  const whole = radiusBand(object, epochMs, startMs, endMs);
  if (whole !== undefined) return whole;
  const atStart = radiusBand(object, epochMs, startMs, startMs);
  if (atStart === undefined) return NOWHERE;
  const isSinking = !isDeepSpace(object.records, object.place) && recordNumber(object, 'bstar') > 0;
  return isSinking ? { lowKm: 0, highKm: atStart.highKm } : undefined;
}

/**
 * Which objects can come within reach of any primary at all: those whose band comes within `reachKm` of the
 * band of a primary. A two-dimensional range query (low end, high end) for each stretch of radius that the
 * primaries cover.
 *
 * @param bands of the objects; those without one always pass
 * @param primaryBands of the primaries; one without a band lets every object pass
 * @returns 1 for each object that passes
 */
export function sieve(
  bands: readonly (RadiusBand | undefined)[],
  primaryBands: readonly (RadiusBand | undefined)[],
  reachKm: number,
): Uint8Array {
  const passes = new Uint8Array(bands.length);
  if (primaryBands.includes(undefined) || bands.length === 0) return passes.fill(1);
  const index = new KDBush(bands.length);
  for (const band of bands) index.add(band?.lowKm ?? 0, band?.highKm ?? Number.MAX_VALUE);
  index.finish();
  for (const { lowKm, highKm } of joined(primaryBands as readonly RadiusBand[])) {
    for (const i of index.range(0, lowKm - reachKm, highKm + reachKm, Number.MAX_VALUE)) passes[i] = 1;
  }
  bands.forEach((band, i) => {
    if (band === undefined) passes[i] = 1;
  });
  return passes;
}

/** Overlapping bands as one. */
function joined(bands: readonly RadiusBand[]): RadiusBand[] {
  const stretches: { lowKm: number; highKm: number }[] = [];
  const somewhere = bands.filter(({ lowKm, highKm }) => lowKm <= highKm);
  for (const { lowKm, highKm } of somewhere.sort((a, b) => a.lowKm - b.lowKm)) {
    const last = stretches.at(-1);
    if (last !== undefined && lowKm <= last.highKm) last.highKm = Math.max(last.highKm, highKm);
    else stretches.push({ lowKm, highKm });
  }
  return stretches;
}
