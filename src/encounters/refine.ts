import { recordStateAt } from '../ephemeris/record-states.js';
import { type PlacedRecord, placeOf } from '../ephemeris/sgp4-records.js';
import { type PositionSamples, placeOfSample } from './position-samples.js';

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
export function velocityDefectKmPerS(object1: PlacedRecord, object2: PlacedRecord): number {
  return eccentricityOf(object1) < 0.01 && eccentricityOf(object2) < 0.01 ? 1e-4 : 0.02;
}

let eccentricityAt: number | undefined;

function eccentricityOf({ records, place }: PlacedRecord): number {
  eccentricityAt ??= placeOf('ecco');
  return records.values[records.size * place + eccentricityAt];
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
  const after = relative[0] ** 2 + relative[1] ** 2 + relative[2] ** 2;
  if (!relativeStateAt(object1, object2, timeMs - DIFFERENCE_S * MS_PER_S, relative)) return Number.NaN;
  const before = relative[0] ** 2 + relative[1] ** 2 + relative[2] ** 2;
  return (after - before) / (4 * DIFFERENCE_S);
}

/** TCA to the microsecond. */
export function roundTca(timeMs: number): number {
  return Math.round(timeMs * 1000) / 1000;
}

/** A minimum of the distance of a pair. */
export type Minimum = { readonly tcaMs: number; readonly missKm: number };

/** What is left of the way where the last steps start: small beside the grids that those start from. */
const NEARER_MS = 0.01;
const NEAR_MS = 1;
const POSITIONS_GRID_MS = 1000;
/** From this speed on a pair may count as fast in a shorter step: it is settled alike there and here. */
const LEAST_FAST_KM_PER_S = 0.004;
/** A Newton step's error is a bound on its size, of which nothing must be seen; a secant's is far smaller than that. */
const NEWTON_DOUBT = 30;
/** What rounding leaves uncertain of a position: angles of hundreds of revolutions resolve no more. */
const POSITION_NOISE_KM = 1e-9;
const MOST_STEPS = 20;

/**
 * The closest approach of a pair whose distance is convex around `guessMs`, on true SGP4 states: near it by
 * secants of r . v, then once more from the nearest whole millisecond (a whole second where positions alone must
 * tell), so that the way there leaves no trace in the result.
 *
 * @param widestKm approaches that are surely wider are not worth going on with
 * @returns its time, rounded to a microsecond, and distance; 'none' where SGP4 gives no state on the way there or
 * the approach is wider than `widestKm`; 'unsettled' where the steps lead nowhere within `reachMs` of the guess
 */
export function refineFastTca(
  object1: PlacedRecord,
  object2: PlacedRecord,
  guessMs: number,
  reachMs: number,
  widestKm = Number.POSITIVE_INFINITY,
): Minimum | 'none' | 'unsettled' {
  const defectKmPerS = velocityDefectKmPerS(object1, object2);
  let timeMs = guessMs;
  let beforeMs = Number.NaN;
  let rateBefore = Number.NaN;
  for (let step = 0; step < MOST_STEPS; step++) {
    if (!relativeStateAt(object1, object2, timeMs, relative)) return 'none';
    const { distance, speed2, rate, stepS } = newtonStep(relative);
    if (Math.abs(stepS) < STRAIGHT_S) {
      const straight2 = distance * distance - stepS * stepS * speed2;
      const surely = widestKm + STRAIGHT_SLACK_KM;
      if (straight2 > surely * surely) return 'none';
    }
    const secantMs = step === 0 ? stepS * MS_PER_S : (-rate * (timeMs - beforeMs)) / (rate - rateBefore);
    beforeMs = timeMs;
    rateBefore = rate;
    timeMs += secantMs;
    if (!(Math.abs(timeMs - guessMs) <= reachMs)) return 'unsettled';
    const leftMs = Math.abs(secantMs) * newtonError(distance, speed2, defectKmPerS);
    if (distance * defectKmPerS > speed2 * TOLERATED_SHIFT_S) {
      if (leftMs < NEAR_MS) return settledOnPositions(object1, object2, timeMs, reachMs, defectKmPerS);
    } else if (leftMs < NEARER_MS) {
      return settledOnVelocities(object1, object2, timeMs, defectKmPerS);
    }
  }
  return 'unsettled';
}

function newtonStep(state: Float64Array) {
  const x = state[0];
  const y = state[1];
  const z = state[2];
  const vx = state[3];
  const vy = state[4];
  const vz = state[5];
  const speed2 = vx * vx + vy * vy + vz * vz;
  const rate = x * vx + y * vy + z * vz;
  return { distance: Math.sqrt(x * x + y * y + z * z), speed2, rate, stepS: -rate / speed2 };
}

function settledOnVelocities(
  object1: PlacedRecord,
  object2: PlacedRecord,
  nearMs: number,
  defectKmPerS: number,
): Minimum | 'none' | 'unsettled' {
  let timeMs = Math.round(nearMs);
  for (let step = 0; step < MOST_STEPS; step++) {
    if (!relativeStateAt(object1, object2, timeMs, relative)) return 'none';
    const { distance, speed2, stepS } = newtonStep(relative);
    const stepMs = stepS * MS_PER_S;
    timeMs += stepMs;
    if (Math.abs(stepMs) * newtonError(distance, speed2, defectKmPerS) >= SETTLED_MS) continue;
    // Over a millisecond the path is straight.
    const missKm = Math.sqrt(Math.max(0, distance * distance - stepS * stepS * speed2));
    return { tcaMs: roundTca(timeMs), missKm };
  }
  return 'unsettled';
}

/** Where SGP4's velocities are not good enough, they give the first step, and secants of the closing rate the rest. */
function settledOnPositions(
  object1: PlacedRecord,
  object2: PlacedRecord,
  nearMs: number,
  reachMs: number,
  defectKmPerS: number,
): Minimum | 'none' | 'unsettled' {
  let timeMs = POSITIONS_GRID_MS * Math.round(nearMs / POSITIONS_GRID_MS);
  if (!relativeStateAt(object1, object2, timeMs, relative)) return 'none';
  const { distance, speed2, stepS } = newtonStep(relative);
  timeMs += stepS * MS_PER_S;
  let rate = closingRateAt(object1, object2, timeMs);
  let stepMs = (-rate / speed2) * MS_PER_S;
  const settledMs = Math.max(SETTLED_MS, (MS_PER_S * distance * POSITION_NOISE_KM) / (DIFFERENCE_S * speed2));
  let leftMs = NEWTON_DOUBT * Math.abs(stepMs) * newtonError(distance, speed2, defectKmPerS);
  for (let step = 0; step < MOST_STEPS && leftMs >= settledMs; step++) {
    const beforeMs = timeMs;
    const rateBefore = rate;
    timeMs += stepMs;
    if (!(Math.abs(timeMs - nearMs) <= reachMs)) return 'unsettled';
    rate = closingRateAt(object1, object2, timeMs);
    stepMs = (-rate * (timeMs - beforeMs)) / (rate - rateBefore);
    leftMs = Math.abs(stepMs);
  }
  if (!(leftMs < settledMs)) return 'unsettled';
  return minimumAt(object1, object2, roundTca(timeMs + stepMs)) ?? 'none';
}

function minimumAt(object1: PlacedRecord, object2: PlacedRecord, tcaMs: number): Minimum | undefined {
  if (!relativeStateAt(object1, object2, tcaMs, relative)) return undefined;
  return { tcaMs, missKm: Math.sqrt(squareOf(relative)) };
}

function speedOf(state: Float64Array): number {
  return Math.sqrt(state[3] * state[3] + state[4] * state[4] + state[5] * state[5]);
}

function squareOf(state: Float64Array): number {
  return state[0] * state[0] + state[1] * state[1] + state[2] * state[2];
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
 * All local minima of the distance of a slow pair from `fromMs` to `toMs`: samples at whole multiples of a step, so
 * that other stretches of time find the same, then a root of the closing rate between the neighbors of each that
 * is lower than these. Two minima that a maximum less than a step long divides count as one.
 *
 * @param object1, object2 with the same step
 */
export function slowMinima(
  object1: PositionSamples,
  object2: PositionSamples,
  fromMs: number,
  toMs: number,
): Minimum[] {
  const { stepMs } = object1;
  const found: Minimum[] = [];
  const first = Math.ceil(fromMs / stepMs) - 1;
  const last = Math.floor(toMs / stepMs) + 1;
  let before = squareAt(object1, object2, first - 1);
  let here = squareAt(object1, object2, first);
  for (let sample = first; sample <= last; sample++) {
    const after = squareAt(object1, object2, sample + 1);
    if (before > here && here <= after) {
      const minimum = minimumAbout(object1, object2, sample * stepMs, stepMs);
      if (minimum !== undefined && minimum.tcaMs >= fromMs && minimum.tcaMs <= toMs) found.push(minimum);
    }
    before = here;
    here = after;
  }
  return found;
}

/** Squared distance at a sample, km^2; NaN where SGP4 gives no state. */
function squareAt(object1: PositionSamples, object2: PositionSamples, sample: number): number {
  const a = placeOfSample(object1, sample);
  const b = placeOfSample(object2, sample);
  const x = object2.positions[b] - object1.positions[a];
  const y = object2.positions[b + 1] - object1.positions[a + 1];
  const z = object2.positions[b + 2] - object1.positions[a + 2];
  return x * x + y * y + z * z;
}

/** The minimum next to a sample that is lower than both of its neighbors. */
function minimumAbout(
  object1: PlacedRecord,
  object2: PlacedRecord,
  middleMs: number,
  gridMs: number,
): Minimum | undefined {
  const rate = closingRateAt(object1, object2, middleMs);
  const rootMs =
    rate < 0
      ? closestBetween(object1, object2, middleMs, rate, middleMs + gridMs, Number.NaN)
      : closestBetween(object1, object2, middleMs - gridMs, Number.NaN, middleMs, rate);
  const minimum = minimumAt(object1, object2, roundTca(rootMs));
  if (minimum === undefined || speedOf(relative) < LEAST_FAST_KM_PER_S) return minimum;
  const settled = refineFastTca(object1, object2, rootMs, POSITIONS_GRID_MS);
  return typeof settled === 'string' ? minimum : settled;
}

const MOST_ROOT_STEPS = 60;

/**
 * Where the closing rate changes its sign, by false position with the Illinois rule (M. Dowell and P. Jarratt, BIT
 * 11, 1971): the rate is nearly straight between two points of the grid, and the root stays between its brackets
 * where it is not.
 *
 * @param lowRate closing rate at `fromMs`, NaN where it is yet to be worked out; `highRate` at `toMs` likewise
 */
function closestBetween(
  object1: PlacedRecord,
  object2: PlacedRecord,
  fromMs: number,
  lowRate: number,
  toMs: number,
  highRate: number,
): number {
  let low = fromMs;
  let high = toMs;
  let rateAtLow = Number.isNaN(lowRate) ? closingRateAt(object1, object2, low) : lowRate;
  let rateAtHigh = Number.isNaN(highRate) ? closingRateAt(object1, object2, high) : highRate;
  let latest = (low + high) / 2;
  let side = 0;
  for (let step = 0; step < MOST_ROOT_STEPS && high - low > SETTLED_MS; step++) {
    const straight = low - (rateAtLow * (high - low)) / (rateAtHigh - rateAtLow);
    // Where a maximum lies between as well, the rates of both ends agree.
    const isBracketed = rateAtLow < 0 && rateAtHigh >= 0 && straight > low && straight < high;
    const next = isBracketed ? straight : (low + high) / 2;
    const moved = Math.abs(next - latest);
    latest = next;
    if (step > 0 && moved < SETTLED_MS) break;
    const rate = closingRateAt(object1, object2, next);
    if (Number.isNaN(rate)) break;
    if (rate < 0) {
      low = next;
      rateAtLow = rate;
      if (side < 0) rateAtHigh /= 2;
      side = -1;
    } else {
      high = next;
      rateAtHigh = rate;
      if (side > 0) rateAtLow /= 2;
      side = 1;
    }
  }
  return latest;
}
