import { recordStateAt } from '../ephemeris/record-states.js';
import type { Sgp4Records } from '../ephemeris/sgp4-records.js';

/** One side of a pair for work on true SGP4 states. */
export type RefinedObject = {
  readonly records: Sgp4Records;
  /** Of its record among the records. */
  readonly place: number;
  /** Its latest states, where many pairs ask for it at the same times. */
  readonly recent?: RecentStates;
};

/** A ring of times with their states; `NaN` positions where SGP4 gives none. */
export type RecentStates = { readonly times: Float64Array; readonly states: Float64Array; next: number };

const RECENT = 12;

export function createRecentStates(): RecentStates {
  return { times: new Float64Array(RECENT).fill(Number.NaN), states: new Float64Array(6 * RECENT), next: 0 };
}

function stateAt({ records, place, recent }: RefinedObject, timeMs: number, out: Float64Array): boolean {
  if (recent === undefined) return recordStateAt(records, place, timeMs, out);
  const { times, states } = recent;
  let at = 0;
  while (at < RECENT && times[at] !== timeMs) at++;
  if (at === RECENT) {
    at = recent.next;
    recent.next = (at + 1) % RECENT;
    times[at] = timeMs;
    if (!recordStateAt(records, place, timeMs, states, 6 * at)) states[6 * at] = Number.NaN;
  }
  for (let k = 0; k < 6; k++) out[k] = states[6 * at + k];
  return !Number.isNaN(out[0]);
}

/** Half the base of the difference that gives the relative velocity of the positions, seconds. */
const DIFFERENCE_S = 0.25;
/** Where SGP4's velocity could move a TCA by more than this, the last steps are taken on positions alone. */
const TOLERATED_SHIFT_S = 1e-4;
const MS_PER_S = 1000;
/** Over so short a time a relative path is straight to within the slack, and SGP4's velocity good enough. */
const STRAIGHT_S = 1;
const STRAIGHT_SLACK_KM = 0.02;
/** A time in milliseconds since 1970 resolves 0.00024 ms in one double. */
const SETTLED_MS = 5e-4;

/** The tide in the lowest orbits, per s^2: by what part of d^2 / v^2 a Newton step for the TCA errs. */
const STRONGEST_TIDE_PER_S2 = 3.2e-6;

const state1 = new Float64Array(6);
const state2 = new Float64Array(6);
const relative = new Float64Array(6);

/**
 * By how much SGP4's velocities of a pair may be off the derivatives of its positions, km/s: 0.02 m/s in low
 * near-circular orbits, up to some m/s in eccentric deep-space ones.
 */
export function velocityDefectKmPerS(object1: RefinedObject, object2: RefinedObject): number {
  return eccentricityOf(object1) < 0.01 && eccentricityOf(object2) < 0.01 ? 1e-4 : 0.02;
}

function eccentricityOf({ records, place }: RefinedObject): number {
  return records.values[records.size * place + records.at.eccentricity];
}

/** Relative state, object 2 minus object 1; false where SGP4 gives no state for one of them. */
export function relativeStateAt(
  object1: RefinedObject,
  object2: RefinedObject,
  timeMs: number,
  out: Float64Array,
): boolean {
  if (!stateAt(object1, timeMs, state1)) return false;
  if (!stateAt(object2, timeMs, state2)) return false;
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
export function closingRateAt(object1: RefinedObject, object2: RefinedObject, timeMs: number): number {
  if (!relativeStateAt(object1, object2, timeMs + DIFFERENCE_S * MS_PER_S, relative)) return Number.NaN;
  const after = relative[0] ** 2 + relative[1] ** 2 + relative[2] ** 2;
  if (!relativeStateAt(object1, object2, timeMs - DIFFERENCE_S * MS_PER_S, relative)) return Number.NaN;
  const before = relative[0] ** 2 + relative[1] ** 2 + relative[2] ** 2;
  return (after - before) / (4 * DIFFERENCE_S);
}

/**
 * Sign of `closingRateAt`, from one state a side where SGP4's velocity is good enough to tell.
 *
 * @returns NaN where SGP4 gives no state
 */
function closingSignAt(object1: RefinedObject, object2: RefinedObject, timeMs: number): number {
  if (!relativeStateAt(object1, object2, timeMs, relative)) return Number.NaN;
  const distance = Math.sqrt(relative[0] ** 2 + relative[1] ** 2 + relative[2] ** 2);
  const rate = relative[0] * relative[3] + relative[1] * relative[4] + relative[2] * relative[5];
  if (Math.abs(rate) > distance * velocityDefectKmPerS(object1, object2)) return Math.sign(rate);
  return Math.sign(closingRateAt(object1, object2, timeMs));
}

/** TCA to the microsecond, so that the way there leaves no trace in the result. */
export function roundTca(timeMs: number): number {
  return Math.round(timeMs * 1000) / 1000;
}

/**
 * Time of closest approach of a pair whose distance is convex around `guessMs`, by Newton's method on true
 * SGP4 states.
 *
 * @param widestKm approaches that are surely wider are not worth going on with
 * @returns the time, rounded to a microsecond, or NaN where SGP4 gives no state on the way there, the
 * iteration leaves `reachMs` around the guess, or the approach is wider than `widestKm`
 */
export function refineFastTca(
  object1: RefinedObject,
  object2: RefinedObject,
  guessMs: number,
  reachMs: number,
  widestKm = Number.POSITIVE_INFINITY,
): number {
  const defectKmPerS = velocityDefectKmPerS(object1, object2);
  let timeMs = guessMs;
  let speed2 = 0;
  let distance = 0;
  for (let iteration = 0; iteration < 20; iteration++) {
    if (!relativeStateAt(object1, object2, timeMs, relative)) return Number.NaN;
    const x = relative[0];
    const y = relative[1];
    const z = relative[2];
    const vx = relative[3];
    const vy = relative[4];
    const vz = relative[5];
    speed2 = vx * vx + vy * vy + vz * vz;
    distance = Math.sqrt(x * x + y * y + z * z);
    const stepS = -(x * vx + y * vy + z * vz) / speed2;
    if (Math.abs(stepS) < STRAIGHT_S) {
      const straight2 = distance * distance - stepS * stepS * speed2;
      const surely = widestKm + STRAIGHT_SLACK_KM;
      if (straight2 > surely * surely) return Number.NaN;
    }
    const stepMs = stepS * MS_PER_S;
    timeMs += stepMs;
    if (!(Math.abs(timeMs - guessMs) <= reachMs)) return Number.NaN;
    if (Math.abs(stepMs) * newtonError(distance, speed2, defectKmPerS) < SETTLED_MS) break;
  }
  if (distance * defectKmPerS > speed2 * TOLERATED_SHIFT_S) {
    for (let iteration = 0; iteration < 6; iteration++) {
      const stepMs = (-closingRateAt(object1, object2, timeMs) / speed2) * MS_PER_S;
      timeMs += stepMs;
      if (!(Math.abs(timeMs - guessMs) <= reachMs)) return Number.NaN;
      if (Math.abs(stepMs) * newtonError(distance, speed2, defectKmPerS) < SETTLED_MS) break;
    }
  }
  return roundTca(timeMs);
}

/**
 * What part of a Newton step for the TCA may be wrong: (d^2)'' / 2 = v^2 + d . d'', of which the step takes but
 * v^2, and that from SGP4's velocities.
 */
function newtonError(distanceKm: number, speed2: number, defectKmPerS: number): number {
  const curved = (STRONGEST_TIDE_PER_S2 * distanceKm * distanceKm) / speed2;
  return Math.min(1, curved + defectKmPerS / Math.sqrt(speed2));
}

/**
 * All local minima of the distance of a slow pair in [fromMs, toMs): sign changes of the closing rate from
 * negative to positive on a grid of `gridMs`, then a root in between. Two minima that a maximum less than a grid
 * step long divides count as one.
 */
export function slowTcas(
  object1: RefinedObject,
  object2: RefinedObject,
  fromMs: number,
  toMs: number,
  gridMs: number,
): number[] {
  const found: number[] = [];
  const steps = Math.max(1, Math.ceil((toMs - fromMs) / gridMs));
  let beforeMs = fromMs;
  let before = closingSignAt(object1, object2, beforeMs);
  for (let k = 1; k <= steps; k++) {
    const afterMs = fromMs + ((toMs - fromMs) * k) / steps;
    const after = closingSignAt(object1, object2, afterMs);
    if (before < 0 && after >= 0) found.push(roundTca(closestBetween(object1, object2, beforeMs, afterMs)));
    beforeMs = afterMs;
    before = after;
  }
  return found;
}

const MOST_ROOT_STEPS = 60;

/**
 * Where the closing rate changes its sign, by false position with the Illinois rule (M. Dowell and P. Jarratt, BIT
 * 11, 1971): the rate is nearly straight between two points of the grid, and the root stays between its brackets
 * where it is not.
 */
function closestBetween(
  object1: RefinedObject,
  object2: RefinedObject,
  fromMs: number,
  toMs: number,
): number {
  let low = fromMs;
  let high = toMs;
  let lowRate = closingRateAt(object1, object2, low);
  let highRate = closingRateAt(object1, object2, high);
  let latest = (low + high) / 2;
  let side = 0;
  for (let step = 0; step < MOST_ROOT_STEPS && high - low > SETTLED_MS; step++) {
    const straight = low - (lowRate * (high - low)) / (highRate - lowRate);
    // Signs are told by velocities where those are good enough: the rates of both ends can then agree.
    const next = straight > low && straight < high ? straight : (low + high) / 2;
    const moved = Math.abs(next - latest);
    latest = next;
    if (step > 0 && moved < SETTLED_MS) break;
    const rate = closingRateAt(object1, object2, next);
    if (Number.isNaN(rate)) break;
    if (rate < 0) {
      low = next;
      lowRate = rate;
      if (side < 0) highRate /= 2;
      side = -1;
    } else {
      high = next;
      highRate = rate;
      if (side > 0) lowRate /= 2;
      side = 1;
    }
  }
  return latest;
}
