import type { PlacedRecord } from '../ephemeris/sgp4-records.js';
import { type Minimum, minimumAt, roundTca, SETTLED_MS } from './minimum.js';
import {
  closingRateAt,
  DIFFERENCE_S,
  relativeStateAt,
  straightPath,
  velocityDefectKmPerS,
} from './relative-state.js';

const MS_PER_S = 1000;
/** Where SGP4's velocity could move a TCA by more than this, the last steps are taken on positions alone. */
const TOLERATED_SHIFT_S = 1e-4;
/** Over so short a time a relative path is straight to within the slack, and SGP4's velocity good enough. */
const STRAIGHT_S = 1;
const STRAIGHT_SLACK_KM = 0.02;
/** The tide in the lowest orbits, per s^2: by what part of d^2 / v^2 a Newton step for the TCA errs. */
const STRONGEST_TIDE_PER_S2 = 3.2e-6;

/** What is left of the way where the last steps start: small beside the grids that those start from. */
const NEARER_MS = 0.01;
const NEAR_MS = 1;
export const POSITIONS_GRID_MS = 1000;
/** A Newton step's error is a bound on its size, of which nothing must be seen; a secant's is far smaller than that. */
const NEWTON_DOUBT = 30;
/** What rounding leaves uncertain of a position: angles of hundreds of revolutions resolve no more. */
const POSITION_NOISE_KM = 1e-9;
const MOST_STEPS = 20;

const relative = new Float64Array(6);

/**
 * The closest approach of a pair whose distance is convex around `guessMs`, on true SGP4 states: near it by
 * secants of r . v, then once more from the nearest whole millisecond (a whole second where positions alone must
 * tell), so that the way there leaves no trace in the result.
 *
 * @param widestKm approaches that are surely wider are not worth going on with
 * @returns its time, rounded to a microsecond, and distance; 'none' where SGP4 gives no state on the way there or
 * the approach is wider than `widestKm`; 'unsettled' where the steps lead nowhere within `reachMs` of the guess
 */
export function fastMinimum(
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
    const { distance2, speed2, rate, nearestS: stepS } = straightPath(relative);
    const distance = Math.sqrt(distance2);
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

function settledOnVelocities(
  object1: PlacedRecord,
  object2: PlacedRecord,
  nearMs: number,
  defectKmPerS: number,
): Minimum | 'none' | 'unsettled' {
  let timeMs = Math.round(nearMs);
  for (let step = 0; step < MOST_STEPS; step++) {
    if (!relativeStateAt(object1, object2, timeMs, relative)) return 'none';
    const { distance2, speed2, nearestS: stepS } = straightPath(relative);
    const distance = Math.sqrt(distance2);
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
  const { distance2, speed2, nearestS } = straightPath(relative);
  const distance = Math.sqrt(distance2);
  timeMs += nearestS * MS_PER_S;
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

/**
 * What part of a Newton step for the TCA may be wrong: (d^2)'' / 2 = v^2 + d . d'', of which the step takes but
 * v^2, and that from SGP4's velocities.
 */
function newtonError(distanceKm: number, speed2: number, defectKmPerS: number): number {
  const curved = (STRONGEST_TIDE_PER_S2 * distanceKm * distanceKm) / speed2;
  return Math.min(1, curved + defectKmPerS / Math.sqrt(speed2));
}
