import { recordStateAt } from '../ephemeris/record-states.js';
import { type PlacedRecord, recordNumber } from '../ephemeris/sgp4-records.js';

/** Half the base of the difference that gives the relative velocity of the positions, seconds. */
export const DIFFERENCE_S = 0.25;
const MS_PER_S = 1000;

const state1 = new Float64Array(6);
const state2 = new Float64Array(6);
const relative = new Float64Array(6);

/**
 * By how much SGP4's velocities of a pair may be off the derivatives of its positions, km/s: 0.02 m/s in low
 * near-circular orbits, up to some m/s in eccentric deep-space ones.
 */
export function velocityDefectKmPerS(object1: PlacedRecord, object2: PlacedRecord): number {
  return recordNumber(object1, 'ecco') < 0.01 && recordNumber(object2, 'ecco') < 0.01 ? 1e-4 : 0.02;
}

/** Relative state, object 2 minus object 1; false where SGP4 gives no state for one of them. */
export function relativeStateAt(
  object1: PlacedRecord,
  object2: PlacedRecord,
  timeMs: number,
  out: Float64Array,
): boolean {
  if (!recordStateAt(object1.records, object1.place, timeMs, state1)) return false;
  if (!recordStateAt(object2.records, object2.place, timeMs, state2)) return false;
  for (let k = 0; k < 6; k++) out[k] = state2[k] - state1[k];
  return true;
}

/**
 * Half the rate of the squared distance, km^2/s, from positions alone. SGP4's velocity is not exactly the
 * derivative of its position (0.02 m/s off in low orbit, up to some m/s in eccentric deep-space orbits),
 * which would move the TCA of a slow pair by seconds.
 *
 * @returns NaN where SGP4 gives no state
 */
export function closingRateAt(object1: PlacedRecord, object2: PlacedRecord, timeMs: number): number {
  if (!relativeStateAt(object1, object2, timeMs + DIFFERENCE_S * MS_PER_S, relative)) return Number.NaN;
  const after = squareOf(relative);
  if (!relativeStateAt(object1, object2, timeMs - DIFFERENCE_S * MS_PER_S, relative)) return Number.NaN;
  const before = squareOf(relative);
  return (after - before) / (4 * DIFFERENCE_S);
}

/**
 * The straight line through a relative state: squares of distance (km^2) and speed, half the rate of the former
 * (km^2/s), and when it is nearest, seconds from then.
 */
export function straightPath(state: Float64Array) {
  const x = state[0];
  const y = state[1];
  const z = state[2];
  const vx = state[3];
  const vy = state[4];
  const vz = state[5];
  const speed2 = vx * vx + vy * vy + vz * vz;
  const rate = x * vx + y * vy + z * vz;
  return { distance2: x * x + y * y + z * z, speed2, rate, nearestS: -rate / speed2 };
}

/** Squared length of the first three components. */
export function squareOf(state: Float64Array): number {
  return state[0] * state[0] + state[1] * state[1] + state[2] * state[2];
}
