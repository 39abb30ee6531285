import { EARTH_RADIUS_KM } from './gravity.js';
import { MEAN_ANOMALY, MEAN_AXIS, MEAN_ECCENTRICITY, MEAN_MOTION, recordMeansAt } from './record-states.js';
import { isDeepSpace, type Sgp4Records } from './sgp4-records.js';

const MS_PER_MINUTE = 60_000;
/**
 * Room for what a mean ellipse leaves out: periods of J2 and J3 up to 15 km, near perigee drawn out along the
 * path; the lunar-solar terms of deep-space orbits some tens of kilometers. Several times that.
 */
const NEAR_EARTH_PAD_KM = 100;
const DEEP_SPACE_PAD_KM = 500;

const means = new Float64Array(4);

/**
 * A radius that an object stays above for some hours: that of its mean ellipse at the end that is nearer to
 * perigee, or the perigee itself, less a pad.
 *
 * @returns 0 where SGP4 gives no state in the middle
 */
export function lowestRadiusKm(records: Sgp4Records, place: number, fromMs: number, toMs: number): number {
  if (!recordMeansAt(records, place, (fromMs + toMs) / 2, means)) return 0;
  const axisKm = means[MEAN_AXIS] * EARTH_RADIUS_KM;
  const eccentricity = means[MEAN_ECCENTRICITY];
  const anomaly = means[MEAN_ANOMALY];
  const half = ((toMs - fromMs) / 2 / MS_PER_MINUTE) * means[MEAN_MOTION];
  // Mean anomaly of the middle, from -pi to pi: what is left of it at the nearer end.
  const middle = anomaly - 2 * Math.PI * Math.round(anomaly / (2 * Math.PI));
  const nearest = Math.max(0, Math.abs(middle) - half);
  const pad = isDeepSpace(records, place) ? DEEP_SPACE_PAD_KM : NEAR_EARTH_PAD_KM;
  return axisKm * (1 - eccentricity * Math.cos(leastEccentricAnomaly(nearest, eccentricity))) - pad;
}

/** Eccentric anomaly for a mean anomaly from 0 to pi, by bisection: a little low, which is the safe side. */
function leastEccentricAnomaly(meanAnomaly: number, eccentricity: number): number {
  let low = 0;
  let high = Math.PI;
  for (let step = 0; step < 20; step++) {
    const middle = (low + high) / 2;
    if (middle - eccentricity * Math.sin(middle) < meanAnomaly) low = middle;
    else high = middle;
  }
  return low;
}
