import { stateOnTrack, type TrackCursor } from '../ephemeris/track-cursor.js';
import { farthestInStepKm, isConvex, type StepBounds, tidePerS2 } from './bounds.js';
import type { ClosestApproach } from './closest-approach.js';
import type { NearPairs } from './near-pairs.js';
import { type ObjectPair, refineFastPair, refineSlowPair, type Sgp4Refiner } from './refine-on-sgp4.js';
import { squareOf, straightPath } from './relative-state.js';
import { pairKey } from './search-problem.js';
import { shellFloorKm } from './shell.js';
import { RECORD_LOW, RECORD_SIZE } from './step-kernel.js';

/** Distance on the tracks of a slow pair is looked at in parts of this. */
const SLOW_TRACK_STEP_S = 20;

/** What refining works on during one slab. Objects of the tracks are numbered in another order, by `order`. */
export type TrackRefiner = Sgp4Refiner & {
  /** Index in `objects` of each object on the tracks. */
  readonly order: Int32Array;
  readonly cursor: TrackCursor;
  /** eps of `bounds.ts` of each object on the tracks. */
  readonly toleranceKm: Float64Array;
  readonly bounds: StepBounds;
};

/** Two objects as they are numbered on the tracks, and in `objects`. */
type Pair = ObjectPair & { readonly a: number; readonly b: number };

const track = new Float64Array(6);
const relative = new Float64Array(6);

/**
 * Finds the closest approaches of the pairs in one step: on their tracks first, and on SGP4 where those come
 * near enough.
 *
 * @param records states in the middle of the step, as in `StepKernel`
 * @param middleS of the step, seconds after the slab's start
 * @param approaches takes what is found
 * @returns number of pairs that went to SGP4
 */
export function refinePairs(
  refiner: TrackRefiner,
  pairs: NearPairs,
  records: Float32Array,
  middleS: number,
  approaches: ClosestApproach[],
): number {
  const { objects, rules, order } = refiner;
  let refined = 0;
  for (let k = 0; k < pairs.size; k++) {
    const a = pairs.first[k];
    const b = pairs.second[k];
    const first = Math.min(order[a], order[b]);
    const second = Math.max(order[a], order[b]);
    if (rules.skippedPairs.size > 0 && rules.skippedPairs.has(pairKey(first, second, objects.count)))
      continue;
    if (refinePair(refiner, { a, b, first, second }, records, middleS, approaches)) refined++;
  }
  return refined;
}

/** @returns whether the pair went to SGP4 */
function refinePair(
  refiner: TrackRefiner,
  pair: Pair,
  records: Float32Array,
  middleS: number,
  approaches: ClosestApproach[],
): boolean {
  const { cursor, toleranceKm, bounds } = refiner;
  const { a, b } = pair;
  const { halfStepS, baseReachKm } = bounds;
  const i = RECORD_SIZE * a;
  const j = RECORD_SIZE * b;
  const speed = Math.sqrt(
    (records[j + 3] - records[i + 3]) ** 2 +
      (records[j + 4] - records[i + 4]) ** 2 +
      (records[j + 5] - records[i + 5]) ** 2,
  );
  const reachKm = baseReachKm + toleranceKm[a] + toleranceKm[b];
  const tracksErrKm = cursor.tracks.toleranceKm[a] + cursor.tracks.toleranceKm[b];
  const tide = tidePerS2(shellFloorKm(Math.min(records[i + RECORD_LOW], records[j + RECORD_LOW])));
  const farthestKm = farthestInStepKm(halfStepS, reachKm, tide, speed);
  // What eps holds beyond the positions is the error of the tracks' velocities over half a step.
  const speedErrorKmPerS = (toleranceKm[a] + toleranceKm[b] - tracksErrKm) / halfStepS;
  const { startMs } = cursor.tracks;
  const stretch = {
    fromMs: startMs + (middleS - halfStepS) * 1000,
    toMs: startMs + (middleS + halfStepS) * 1000,
  };
  if (isConvex(halfStepS, farthestKm, tide, speed - speedErrorKmPerS)) {
    const guessS = nearestOnTracks(refiner, pair, middleS, tracksErrKm);
    if (Number.isNaN(guessS)) return false;
    refineFastPair(refiner, pair, stretch, startMs + guessS * 1000, approaches);
    return true;
  }
  const fastestKmPerS = speed + tide * farthestKm * halfStepS;
  if (!comesNearOnTracks(refiner, pair, middleS, tracksErrKm, fastestKmPerS)) return false;
  refineSlowPair(refiner, pair, stretch, approaches);
  return true;
}

/** Relative state of two tracks, b minus a. */
function relativeOnTracks(cursor: TrackCursor, a: number, b: number, timeS: number): void {
  stateOnTrack(cursor, b, timeS, relative, 0);
  stateOnTrack(cursor, a, timeS, track, 0);
  for (let k = 0; k < 6; k++) relative[k] -= track[k];
}

/**
 * Time of the closest approach of two tracks whose distance has one minimum in the step, in seconds after the
 * slab's start; NaN where it is not in the step or too wide to be one within reach on SGP4.
 *
 * @param errorKm what both tracks together may be off SGP4
 */
function nearestOnTracks(
  { cursor, rules, bounds }: TrackRefiner,
  { a, b }: Pair,
  middleS: number,
  errorKm: number,
): number {
  const { halfStepS } = bounds;
  const limitKm = rules.missKm + errorKm;
  const segmentS = Math.min(cursor.tracks.segmentS[a], cursor.tracks.segmentS[b]);
  let timeS = middleS;
  let distance2 = 0;
  for (let iteration = 0; iteration < 8; iteration++) {
    relativeOnTracks(cursor, a, b, timeS);
    const straight = straightPath(relative);
    const { speed2 } = straight;
    distance2 = straight.distance2;
    // The tracks' errors in place and in speed move their closest approach by no more than this.
    const beyondS = 0.01 + errorKm / Math.sqrt(speed2) + (limitKm * 6.5 * errorKm) / (segmentS * speed2);
    const reachS = halfStepS + Math.min(beyondS, halfStepS);
    const nextS = timeS + straight.nearestS;
    const clampedS = Math.max(middleS - reachS, Math.min(middleS + reachS, nextS));
    const done = Math.abs(clampedS - timeS) < 1e-3;
    timeS = clampedS;
    if (done) break;
  }
  return distance2 > limitKm * limitKm ? Number.NaN : timeS;
}

/** Whether two tracks that are slow against each other come near enough, anywhere in the step, for SGP4. */
function comesNearOnTracks(
  { cursor, rules, bounds: { halfStepS } }: TrackRefiner,
  { a, b }: Pair,
  middleS: number,
  errorKm: number,
  fastestKmPerS: number,
): boolean {
  const parts = Math.max(1, Math.ceil((2 * halfStepS) / SLOW_TRACK_STEP_S));
  const partS = (2 * halfStepS) / parts;
  const limitKm = rules.missKm + errorKm + fastestKmPerS * partS * 0.5;
  for (let k = 0; k < parts; k++) {
    relativeOnTracks(cursor, a, b, middleS - halfStepS + (k + 0.5) * partS);
    if (squareOf(relative) <= limitKm * limitKm) return true;
  }
  return false;
}
