import type { PlacedRecord } from '../ephemeris/sgp4-records.js';
import { fastMinimum, POSITIONS_GRID_MS } from './fast-minimum.js';
import { type Minimum, minimumAt, roundTca, SETTLED_MS } from './minimum.js';
import { type PositionSamples, placeOfSample } from './position-samples.js';
import { closingRateAt, relativeStateAt } from './relative-state.js';

/** From this speed on a pair may count as fast in a shorter step: it is settled alike there and here. */
const LEAST_FAST_KM_PER_S = 0.004;

const relative = new Float64Array(6);

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
  const tcaMs = roundTca(rootMs);
  const minimum = minimumAt(object1, object2, tcaMs);
  if (minimum === undefined || !relativeStateAt(object1, object2, tcaMs, relative)) return minimum;
  if (speedOf(relative) < LEAST_FAST_KM_PER_S) return minimum;
  const settled = fastMinimum(object1, object2, rootMs, POSITIONS_GRID_MS);
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

function speedOf(state: Float64Array): number {
  return Math.sqrt(state[3] * state[3] + state[4] * state[4] + state[5] * state[5]);
}
