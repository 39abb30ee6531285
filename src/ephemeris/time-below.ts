import { EARTH_RADIUS_KM } from './gravity.js';
import { MEAN_ANOMALY, MEAN_AXIS, MEAN_ECCENTRICITY, MEAN_MOTION, recordMeansAt } from './record-states.js';
import { isDeepSpace, type Sgp4Records } from './sgp4-records.js';

/** A stretch of time, milliseconds of UTC since 1970-01-01. */
export type TimeBelow = { readonly fromMs: number; readonly toMs: number };

const MS_PER_MINUTE = 60_000;
/**
 * Room for what a mean ellipse leaves out: periods of J2 and J3 up to 15 km, near perigee drawn out along the
 * path; the lunar-solar terms of deep-space orbits some tens of kilometers. Several times that.
 */
const NEAR_EARTH_PAD_KM = 100;
const DEEP_SPACE_PAD_KM = 500;

const means = new Float64Array(4);

/**
 * When an object can be below a radius during some hours: about its perigees, as far as its mean ellipse is below
 * that radius and a pad.
 *
 * @returns one stretch from the first such moment to the last, all of the time where SGP4 gives no state in the
 * middle; `undefined` where there is none
 */
export function timeBelow(
  records: Sgp4Records,
  place: number,
  radiusKm: number,
  fromMs: number,
  toMs: number,
): TimeBelow | undefined {
  const whole = { fromMs, toMs };
  const middleMs = (fromMs + toMs) / 2;
  if (!recordMeansAt(records, place, middleMs, means)) return whole;
  const padKm = isDeepSpace(records, place) ? DEEP_SPACE_PAD_KM : NEAR_EARTH_PAD_KM;
  const axisKm = means[MEAN_AXIS] * EARTH_RADIUS_KM;
  const eccentricity = means[MEAN_ECCENTRICITY];
  // r = a (1 - e cos E).
  const cosine = (1 - (radiusKm + padKm) / axisKm) / eccentricity;
  if (cosine > 1) return undefined;
  // Written so that a NaN is taken as whole, too.
  if (!(cosine > -1)) return whole;
  const eccentricAnomaly = Math.acos(cosine);
  const reach = eccentricAnomaly - eccentricity * Math.sin(eccentricAnomaly);
  const perMs = means[MEAN_MOTION] / MS_PER_MINUTE;
  const half = (perMs * (toMs - fromMs)) / 2;
  // Mean anomalies from the middle on run from -half to half; perigees lie at whole turns less that of the middle.
  const turn = 2 * Math.PI;
  const anomaly = means[MEAN_ANOMALY];
  const first = turn * Math.ceil((anomaly - half - reach) / turn) - anomaly;
  const last = turn * Math.floor((anomaly + half + reach) / turn) - anomaly;
  if (first > last) return undefined;
  return {
    fromMs: Math.max(fromMs, middleMs + (first - reach) / perMs),
    toMs: Math.min(toMs, middleMs + (last + reach) / perMs),
  };
}
