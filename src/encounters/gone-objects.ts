import { EARTH_RADIUS_KM } from '../ephemeris/gravity.js';
import {
  MEAN_ANOMALY,
  MEAN_AXIS,
  MEAN_ECCENTRICITY,
  MEAN_MOTION,
  recordMeansAt,
  recordStateAt,
} from '../ephemeris/record-states.js';
import type { Sgp4Records } from '../ephemeris/sgp4-records.js';

const MS_PER_MINUTE = 60_000;
/** Orbits that come lower than this may run into the ground, where SGP4 gives up. */
const SUSPICIOUS_RADIUS_KM = EARTH_RADIUS_KM + 100;
/** Looks about each perigee, minutes from it. */
const LOOKS = [0, -3, 3];

const means = new Float64Array(4);
const state = new Float64Array(6);

/**
 * A time of the window at which SGP4 gives no state for an object, where one is found at its start or near a
 * perigee: an object that SGP4 has given up on counts as gone, even where states come out again, as they do in
 * orbits that pass through the ground. The object may be gone before.
 *
 * @returns infinite where no such time is found
 */
export function goneFromMs(records: Sgp4Records, place: number, startMs: number, endMs: number): number {
  if (!recordMeansAt(records, place, startMs, means)) return startMs;
  const perigeeKm = means[MEAN_AXIS] * (1 - means[MEAN_ECCENTRICITY]) * EARTH_RADIUS_KM;
  if (perigeeKm > SUSPICIOUS_RADIUS_KM) return Number.POSITIVE_INFINITY;
  const periodMs = ((2 * Math.PI) / means[MEAN_MOTION]) * MS_PER_MINUTE;
  const toPerigee = (2 * Math.PI - means[MEAN_ANOMALY]) / (2 * Math.PI);
  for (let passMs = startMs + (toPerigee % 1) * periodMs; passMs < endMs; passMs += periodMs) {
    for (const minutes of LOOKS) {
      const timeMs = passMs + minutes * MS_PER_MINUTE;
      if (timeMs >= startMs && !recordStateAt(records, place, timeMs, state)) return timeMs;
    }
  }
  return Number.POSITIVE_INFINITY;
}
