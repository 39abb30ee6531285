import { stateOnTrack, type TrackCursor } from '../ephemeris/track-cursor.js';
import { farthestInStepKm, isConvex, type StepBounds, tidePerS2 } from './bounds.js';
import type { ClosestApproach } from './closest-approach.js';
import type { NearPairs } from './near-pairs.js';
import {
  createRecentStates,
  type RecentStates,
  type RefinedObject,
  refineFastTca,
  relativeStateAt,
  slowTcas,
} from './refine.js';
import { pairKey, type SearchObjects, type SearchRules } from './search-problem.js';
import { shellFloorKm } from './shell.js';
import { RECORD_LOW, RECORD_SIZE } from './step-kernel.js';

/** Grid of the sign changes of a slow pair. */
const SLOW_GRID_MS = 40_000;
/** A refined TCA is taken by the step that holds it; this much over its edges covers rounding. */
const EDGE_MS = 0.01;
/** Distance on the tracks of a slow pair is looked at in parts of this. */
const SLOW_TRACK_STEP_S = 20;

/** What refining works on during one slab. Objects of the tracks are numbered in another order, by `order`. */
export type Refiner = {
  readonly objects: SearchObjects;
  readonly rules: SearchRules;
  /** Index in `objects` of each object on the tracks. */
  readonly order: Int32Array;
  readonly cursor: TrackCursor;
  /** eps of `bounds.ts` of each object on the tracks. */
  readonly toleranceKm: Float64Array;
  readonly bounds: StepBounds;
  /** Latest states of the objects in slow pairs, by their index in `objects`. */
  readonly recent: Map<number, RecentStates>;
};

type Step = { readonly middleS: number; readonly fromMs: number; readonly toMs: number };

/** Two objects as they are numbered on the tracks, and in `objects`, there the lower one first. */
type Pair = { readonly a: number; readonly b: number; readonly first: number; readonly second: number };

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
  refiner: Refiner,
  pairs: NearPairs,
  records: Float32Array,
  middleS: number,
  approaches: ClosestApproach[],
): number {
  const { objects, rules, order, cursor, bounds } = refiner;
  const middleMs = cursor.tracks.startMs + middleS * 1000;
  const step = {
    middleS,
    fromMs: middleMs - bounds.halfStepS * 1000,
    toMs: middleMs + bounds.halfStepS * 1000,
  };
  let refined = 0;
  for (let k = 0; k < pairs.size; k++) {
    const a = pairs.first[k];
    const b = pairs.second[k];
    const first = Math.min(order[a], order[b]);
    const second = Math.max(order[a], order[b]);
    if (rules.skippedPairs.size > 0 && rules.skippedPairs.has(pairKey(first, second, objects.count)))
      continue;
    if (refinePair(refiner, { a, b, first, second }, records, step, approaches)) refined++;
  }
  return refined;
}

/** @returns whether the pair went to SGP4 */
function refinePair(
  refiner: Refiner,
  pair: Pair,
  records: Float32Array,
  step: Step,
  approaches: ClosestApproach[],
): boolean {
  const { cursor, toleranceKm, bounds, rules } = refiner;
  const { a, b, first, second } = pair;
  const { halfStepS, baseReachKm } = bounds;
  const i = RECORD_SIZE * a;
  const j = RECORD_SIZE * b;
  const speed = Math.hypot(
    records[j + 3] - records[i + 3],
    records[j + 4] - records[i + 4],
    records[j + 5] - records[i + 5],
  );
  const reachKm = baseReachKm + toleranceKm[a] + toleranceKm[b];
  const tracksErrKm = cursor.tracks.toleranceKm[a] + cursor.tracks.toleranceKm[b];
  const tide = tidePerS2(shellFloorKm(Math.min(records[i + RECORD_LOW], records[j + RECORD_LOW])));
  const farthestKm = farthestInStepKm(halfStepS, reachKm, tide, speed);
  // What eps holds beyond the positions is the error of the tracks' velocities over half a step.
  const speedErrorKmPerS = (toleranceKm[a] + toleranceKm[b] - tracksErrKm) / halfStepS;
  if (isConvex(halfStepS, farthestKm, tide, speed - speedErrorKmPerS)) {
    const guessS = nearestOnTracks(refiner, pair, step.middleS, tracksErrKm);
    if (Number.isNaN(guessS)) return false;
    const object1 = refinedObject(refiner, first);
    const object2 = refinedObject(refiner, second);
    const guessMs = cursor.tracks.startMs + guessS * 1000;
    const tcaMs = refineFastTca(object1, object2, guessMs, 2000 * halfStepS, rules.missKm);
    accept(refiner, pair, object1, object2, tcaMs, step, approaches);
    return true;
  }
  const fastestKmPerS = speed + tide * farthestKm * halfStepS;
  if (!comesNearOnTracks(refiner, pair, step.middleS, tracksErrKm, fastestKmPerS)) return false;
  const object1 = objectWithRecentStates(refiner, first);
  const object2 = objectWithRecentStates(refiner, second);
  for (const tcaMs of slowTcas(object1, object2, step.fromMs, step.toMs, SLOW_GRID_MS)) {
    accept(refiner, pair, object1, object2, tcaMs, step, approaches);
  }
  return true;
}

function refinedObject({ objects: { records, epochMs } }: Refiner, object: number): RefinedObject {
  return { record: records[object], epochMs: epochMs[object] };
}

/** Slow pairs are asked for at the same times, and one object is part of many in a train. */
function objectWithRecentStates(refiner: Refiner, object: number): RefinedObject {
  let recent = refiner.recent.get(object);
  if (recent === undefined) {
    recent = createRecentStates();
    refiner.recent.set(object, recent);
  }
  return { ...refinedObject(refiner, object), recent };
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
  { cursor, rules, bounds }: Refiner,
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
    const x = relative[0];
    const y = relative[1];
    const z = relative[2];
    const vx = relative[3];
    const vy = relative[4];
    const vz = relative[5];
    const speed2 = vx * vx + vy * vy + vz * vz;
    distance2 = x * x + y * y + z * z;
    // The tracks' errors in place and in speed move their closest approach by no more than this.
    const beyondS = 0.01 + errorKm / Math.sqrt(speed2) + (limitKm * 6.5 * errorKm) / (segmentS * speed2);
    const reachS = halfStepS + Math.min(beyondS, halfStepS);
    const nextS = timeS - (x * vx + y * vy + z * vz) / speed2;
    const clampedS = Math.max(middleS - reachS, Math.min(middleS + reachS, nextS));
    const done = Math.abs(clampedS - timeS) < 1e-3;
    timeS = clampedS;
    if (done) break;
  }
  return distance2 > limitKm * limitKm ? Number.NaN : timeS;
}

/** Whether two tracks that are slow against each other come near enough, anywhere in the step, for SGP4. */
function comesNearOnTracks(
  { cursor, rules, bounds: { halfStepS } }: Refiner,
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
    if (relative[0] ** 2 + relative[1] ** 2 + relative[2] ** 2 <= limitKm * limitKm) return true;
  }
  return false;
}

/** Takes a closest approach that lies in the step, in the window and in the time of both objects. */
function accept(
  { objects, rules }: Refiner,
  { first, second }: Pair,
  object1: RefinedObject,
  object2: RefinedObject,
  tcaMs: number,
  { fromMs, toMs }: Step,
  approaches: ClosestApproach[],
): void {
  if (!(tcaMs >= fromMs - EDGE_MS && tcaMs < toMs + EDGE_MS)) return;
  if (tcaMs < rules.startMs || tcaMs >= rules.endMs) return;
  if (tcaMs < objects.validFromMs[first] || tcaMs >= objects.validToMs[first]) return;
  if (tcaMs < objects.validFromMs[second] || tcaMs >= objects.validToMs[second]) return;
  if (!relativeStateAt(object1, object2, tcaMs, relative)) return;
  const missKm = Math.sqrt(relative[0] ** 2 + relative[1] ** 2 + relative[2] ** 2);
  if (missKm <= rules.missKm) approaches.push({ first, second, tcaMs, missKm });
}
