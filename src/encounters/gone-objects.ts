import { checkForDecay, type SatRec, sgp4 } from 'satellite.js';
import { EARTH_RADIUS_KM } from '../ephemeris/gravity.js';
import { osculatingPerigeeKm } from '../ephemeris/osculating-perigee.js';
import { recordStateAt } from '../ephemeris/record-states.js';
import { sgp4StateAt } from '../ephemeris/sgp4-state.js';
import type { SearchObjects } from './search-problem.js';

const MS_PER_MINUTE = 60_000;
/** Orbits that come lower than this may run into the ground, where SGP4 gives up. */
const SUSPICIOUS_RADIUS_KM = EARTH_RADIUS_KM + 100;
/** By less than this the perigee of the orbit through one state differs from that of the mean elements. */
const OSCULATING_ROOM_KM = 150;
/** Looks about each perigee, minutes from it. */
const LOOKS = [0, -3, 3];

const state = new Float64Array(6);

/** `goneFromMs` of all objects: what is nowhere near the ground is told by one state. */
export function goneTimes(
  { count, records, recordOf, epochMs }: SearchObjects,
  startMs: number,
  endMs: number,
): Float64Array {
  return Float64Array.from({ length: count }, (_, object) => {
    if (!recordStateAt(records, object, startMs, state)) return startMs;
    const isHigh = osculatingPerigeeKm(state, 0) > SUSPICIOUS_RADIUS_KM + OSCULATING_ROOM_KM;
    return isHigh ? Number.POSITIVE_INFINITY : goneFromMs(recordOf(object), epochMs[object], startMs, endMs);
  });
}

/**
 * A time of the window at which SGP4 gives no state for an object, where one is found at its start or near a
 * perigee: an object that SGP4 has given up on counts as gone, even where states come out again, as they do in
 * orbits that pass through the ground. The object may be gone before.
 *
 * @returns infinite where no such time is found
 */
export function goneFromMs(record: SatRec, epochMs: number, startMs: number, endMs: number): number {
  const atStart = sgp4(record, (startMs - epochMs) / MS_PER_MINUTE);
  if (atStart === null || checkForDecay(record)) return startMs;
  const { am, em, mm, nm } = atStart.meanElements;
  if (am * (1 - em) * EARTH_RADIUS_KM > SUSPICIOUS_RADIUS_KM) return Number.POSITIVE_INFINITY;
  const periodMs = ((2 * Math.PI) / nm) * MS_PER_MINUTE;
  const toPerigee = (2 * Math.PI - mm) / (2 * Math.PI);
  for (let passMs = startMs + (toPerigee % 1) * periodMs; passMs < endMs; passMs += periodMs) {
    for (const minutes of LOOKS) {
      const timeMs = passMs + minutes * MS_PER_MINUTE;
      if (timeMs >= startMs && !sgp4StateAt(record, epochMs, timeMs, state)) return timeMs;
    }
  }
  return Number.POSITIVE_INFINITY;
}
