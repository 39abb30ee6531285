import { SLAB_S } from '../ephemeris/node-spacing.js';
import { SEGMENT_SIZE } from '../ephemeris/septic.js';
import { createTrackCursor, stateOnTrack, type TrackCursor } from '../ephemeris/track-cursor.js';
import { createTrackMaker, type SlabTracks, type TrackMaker } from '../ephemeris/tracks.js';
import {
  farthestInStepKm,
  isConvex,
  radialAcceleration,
  type StepBounds,
  stepBounds,
  stepToleranceKm,
  tidePerS2,
} from './bounds.js';
import { type Columns, createColumns, fillColumns, sortByHeight } from './columns.js';
import { directionCells } from './direction-cells.js';
import {
  type CellPartners,
  cellPartners,
  createNearPairs,
  findPairsAcross,
  findPairsOfLists,
  findPairsWithColumns,
  findPairsWithin,
  type NearPairs,
  type Sweep,
  sweepOf,
} from './near-pairs.js';
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
import {
  ABSENT,
  createStepBatch,
  evaluateSteps,
  FLAT,
  RECORD_SIZE,
  STEEP,
  type StepBatch,
  type StepObjects,
  type StepStates,
} from './step-states.js';

/** A local minimum of the distance of two objects, on true SGP4 states. */
export type ClosestApproach = {
  /** Object indices, `first` < `second`. */
  readonly first: number;
  readonly second: number;
  readonly tcaMs: number;
  readonly missKm: number;
};

export type SlabResult = {
  /** By TCA, then by objects. */
  readonly approaches: readonly ClosestApproach[];
  /** Objects that SGP4 gave up on in this slab, with the last millisecond that has a state. */
  readonly failures: readonly { readonly object: number; readonly lastMs: number }[];
  readonly stepS: number;
  readonly worstDefectKm: number;
  readonly watchedCount: number;
  readonly pairsRefined: number;
};

/** Steps that a slab can be cut into; the search takes the one that costs least. */
const STEPS_S = [20, 24, 30, 36, 40, 48, 60, 72, 80, 90, 96, 120, 150, 160, 180, 200, 240, 300];
/** Cost of stepping an object against that of looking at a pair: sets the step, not the result. */
const OBJECT_COST = 16;
const TRIAL_STEP_S = 120;
/** Grid of the sign changes of a slow pair. */
const SLOW_GRID_MS = 40_000;
/** A refined TCA is taken by the step that holds it; this much over its edges covers rounding. */
const EDGE_MS = 0.01;
/** Steps that are evaluated together. */
const BATCH_STEPS = 4;
/** Distance on the tracks of a slow pair is looked at in parts of this. */
const SLOW_TRACK_STEP_S = 20;
/** What single precision rounds away of three components, with room for that of the velocity over a step. */
const RECORD_ROUNDING = 2e-7;

/** Two minima of one pair cannot be this close: they are one, found by two steps or two slabs. */
const SAME_MS = 1;

/** Puts approaches in order (TCA, then objects) and drops those that two steps or two slabs both found. */
export function distinctApproaches(
  approaches: readonly ClosestApproach[],
  objectCount: number,
): ClosestApproach[] {
  const sorted = [...approaches].sort(
    (a, b) => a.tcaMs - b.tcaMs || a.first - b.first || a.second - b.second,
  );
  const lastTcaMs = new Map<number, number>();
  return sorted.filter(({ first, second, tcaMs }) => {
    const key = pairKey(first, second, objectCount);
    const before = lastTcaMs.get(key);
    lastTcaMs.set(key, tcaMs);
    return before === undefined || tcaMs - before > SAME_MS;
  });
}

export type SlabSearcher = {
  readonly objects: SearchObjects;
  readonly rules: SearchRules;
  /**
   * Index in `objects` of each object of the search, which numbers them by size of orbit, primaries first:
   * what meets in space then lies close together in memory.
   */
  readonly order: Int32Array;
  readonly makeTracks: TrackMaker;
  readonly curvature: Float64Array;
  /** No track goes farther out, km. */
  readonly farthestKm: Float64Array;
  /** Room that every slab uses again. */
  readonly coefficients: Float64Array;
  readonly batch: StepBatch;
};

/** Number of slabs of a window. */
export function slabCount({ startMs, endMs }: Pick<SearchRules, 'startMs' | 'endMs'>): number {
  return Math.ceil((endMs - startMs) / (SLAB_S * 1000));
}

/** `loadBulkPropagator` must have been awaited in this thread. */
export function createSlabSearcher(objects: SearchObjects, rules: SearchRules): SlabSearcher {
  const { count, primaryCount, records, epochMs, eccentricity, perigeeRadiusKm } = objects;
  const axisKm = perigeeRadiusKm.map((radiusKm, i) => radiusKm / (1 - eccentricity[i]));
  const order = Int32Array.from({ length: count }, (_, i) => i);
  order.subarray(0, primaryCount).sort((a, b) => axisKm[a] - axisKm[b] || a - b);
  order.subarray(primaryCount).sort((a, b) => axisKm[a] - axisKm[b] || a - b);
  return {
    objects,
    rules,
    order,
    curvature: Float64Array.from(order, (i) => radialAcceleration(eccentricity[i], perigeeRadiusKm[i])),
    farthestKm: Float64Array.from(order, (i) => 1.02 * axisKm[i] * (1 + eccentricity[i]) + 100),
    coefficients: new Float64Array(SEGMENT_SIZE * count),
    batch: createStepBatch(count, BATCH_STEPS),
    makeTracks: createTrackMaker(
      Array.from(order, (i) => ({
        record: records[i],
        epochMs: epochMs[i],
        eccentricity: eccentricity[i],
        perigeeRadiusKm: perigeeRadiusKm[i],
      })),
    ),
  };
}

/** Objects of one side that may meet something in the slab, and those of the current step by kind. */
type Side = {
  readonly candidates: Int32Array;
  readonly there: Int32Array;
  readonly flat: Int32Array;
  readonly steep: Int32Array;
  readonly fast: Int32Array;
  /** Room for those that are flat or steep in order of height. */
  readonly sorted: Int32Array;
  thereCount: number;
  flatCount: number;
  steepCount: number;
  fastCount: number;
};

type Workspace = {
  readonly searcher: SlabSearcher;
  readonly tracks: SlabTracks;
  readonly cursor: TrackCursor;
  /** When each object is there, seconds after the slab's start. */
  readonly fromS: Float64Array;
  readonly toS: Float64Array;
  readonly primaries: Side;
  readonly others: Side;
  readonly pairs: NearPairs;
  /** Latest states of the objects in slow pairs, by their index in `objects`. */
  readonly recent: Map<number, RecentStates>;
};

/** What hangs on the length of a step. */
type StepPlan = {
  readonly bounds: StepBounds;
  readonly partners: CellPartners;
  /** eps of each object. */
  readonly toleranceKm: Float64Array;
  readonly evaluated: StepObjects;
  /** The primaries that are not fast, by cell and in the columns of earlier cells, or of all within reach. */
  readonly flatOwn: Columns;
  readonly flatLater: Columns;
  readonly flatAround: Columns;
  readonly steepOwn: Columns;
  readonly steepLater: Columns;
  readonly steepAround: Columns;
};

/** Finds every closest approach of one slab of the window. */
export function searchSlab(searcher: SlabSearcher, slabIndex: number): SlabResult {
  const { objects, rules, order } = searcher;
  const slabStartMs = rules.startMs + slabIndex * SLAB_S * 1000;
  const lengthS = Math.min(SLAB_S, (rules.endMs - slabStartMs) / 1000);
  const tracks = searcher.makeTracks(slabStartMs, slabIndex);
  const failures: { object: number; lastMs: number }[] = [];
  for (let i = 0; i < objects.count; i++) {
    const lastMs = slabStartMs + tracks.endS[i] * 1000;
    // A failure outside of the object's own time or past the window's end is none.
    if (tracks.endS[i] < lengthS && lastMs < objects.validToMs[order[i]]) {
      failures.push({ object: order[i], lastMs });
    }
  }
  failures.sort((a, b) => a.object - b.object);
  const work = createWorkspace(searcher, tracks, lengthS);
  const stepS = chooseStep(work, lengthS);
  const plan = planStep(work, stepS);
  const approaches: ClosestApproach[] = [];
  let pairsRefined = 0;
  const stepCount = Math.ceil(lengthS / stepS);
  for (let from = 0; from < stepCount; from += BATCH_STEPS) {
    const count = Math.min(BATCH_STEPS, stepCount - from);
    evaluateBatch(work, plan, (from + 0.5) * stepS, count);
    for (let k = 0; k < count; k++) {
      const sweep = findNearPairs(work, plan, searcher.batch.steps[k]);
      pairsRefined += refinePairs(work, plan, sweep, (from + k + 0.5) * stepS, approaches);
    }
  }
  return {
    approaches: distinctApproaches(approaches, objects.count),
    failures,
    stepS,
    worstDefectKm: tracks.worstDefectKm,
    watchedCount: tracks.watchedCount,
    pairsRefined,
  };
}

function createWorkspace(searcher: SlabSearcher, tracks: SlabTracks, lengthS: number): Workspace {
  const { objects, order } = searcher;
  const fromS = Float64Array.from(order, (i) => (objects.validFromMs[i] - tracks.startMs) / 1000);
  const toS = Float64Array.from(order, (i, k) =>
    Math.min(tracks.endS[k], (objects.validToMs[i] - tracks.startMs) / 1000),
  );
  const isThere = (object: number) =>
    fromS[object] < lengthS && toS[object] > 0 && fromS[object] < toS[object];
  const indices = Int32Array.from({ length: objects.count }, (_, i) => i);
  const primaries = indices.subarray(0, objects.primaryCount).filter(isThere);
  const others = withinHeights(
    searcher,
    tracks,
    primaries,
    indices.subarray(objects.primaryCount).filter(isThere),
  );
  return {
    searcher,
    tracks,
    cursor: createTrackCursor(tracks, searcher.coefficients),
    fromS,
    toS,
    primaries: sideOf(primaries),
    others: sideOf(others),
    pairs: createNearPairs(),
    recent: new Map(),
  };
}

function sideOf(candidates: Int32Array): Side {
  const [there, flat, steep, fast, sorted] = [0, 1, 2, 3, 4].map(() => new Int32Array(candidates.length));
  return {
    candidates,
    there,
    flat,
    steep,
    fast,
    sorted,
    thereCount: 0,
    flatCount: 0,
    steepCount: 0,
    fastCount: 0,
  };
}

/** Those of the others whose heights over the slab come within reach of any primary's. */
function withinHeights(
  searcher: SlabSearcher,
  tracks: SlabTracks,
  primaries: Int32Array,
  others: Int32Array,
): Int32Array {
  if (others.length === 0 || primaries.length === 0) return others.subarray(0, 0);
  const reachKm = searcher.rules.missKm + 1;
  const bottom = primaries.reduce(
    (low, object) => Math.min(low, radiusRange(searcher, tracks, object)[0]),
    Number.POSITIVE_INFINITY,
  );
  const top = primaries.reduce((high, object) => Math.max(high, radiusRange(searcher, tracks, object)[1]), 0);
  return others.filter((object) => {
    const [low, high] = radiusRange(searcher, tracks, object);
    return low - reachKm <= top && high + reachKm >= bottom;
  });
}

/** Radii that a track stays within over the slab: those of its nodes, and A h^2 / 8 for the arcs between them. */
function radiusRange({ curvature }: SlabSearcher, tracks: SlabTracks, object: number): [number, number] {
  const { nodes, segmentS } = tracks;
  let low2 = Number.POSITIVE_INFINITY;
  let high2 = 0;
  const first = 6 * tracks.firstNode[object];
  for (let at = first; at <= first + 6 * tracks.segmentCount[object]; at += 6) {
    const radius2 = nodes[at] * nodes[at] + nodes[at + 1] * nodes[at + 1] + nodes[at + 2] * nodes[at + 2];
    low2 = Math.min(low2, radius2);
    high2 = Math.max(high2, radius2);
  }
  const swing = (curvature[object] * segmentS[object] * segmentS[object]) / 8 + tracks.toleranceKm[object];
  return [Math.sqrt(low2) - swing, Math.sqrt(high2) + swing];
}

function planStep({ searcher, tracks, fromS, toS, primaries, others }: Workspace, stepS: number): StepPlan {
  const { rules, curvature, farthestKm } = searcher;
  const halfStepS = stepS / 2;
  const toleranceKm = tracks.toleranceKm.map(
    (tolerance, i) =>
      stepToleranceKm(tolerance, tracks.segmentS[i], halfStepS) + RECORD_ROUNDING * farthestKm[i],
  );
  let widestKm = 0;
  for (const { candidates } of [primaries, others]) {
    for (const object of candidates) widestKm = Math.max(widestKm, toleranceKm[object]);
  }
  const bounds = stepBounds(rules.missKm, halfStepS, widestKm);
  const cells = directionCells(bounds.ordinaryAngle);
  const marginKm = toleranceKm.map((tolerance) => bounds.baseReachKm / 2 + tolerance);
  return {
    bounds,
    partners: cellPartners(cells, bounds),
    toleranceKm,
    evaluated: { cells, halfStepS, fromS, toS, curvature, marginKm },
    flatOwn: createColumns(cells.count),
    flatLater: createColumns(cells.count),
    flatAround: createColumns(cells.count),
    steepOwn: createColumns(cells.count),
    steepLater: createColumns(cells.count),
    steepAround: createColumns(cells.count),
  };
}

/**
 * The step that costs least: looking at pairs grows with the square of the step (the area that a cell
 * covers), stepping the objects falls with it. It depends on the objects alone, so that the work is the same
 * on every machine.
 */
function chooseStep(work: Workspace, lengthS: number): number {
  const { stepS } = work.searcher.rules;
  if (stepS !== undefined) return stepS;
  const plan = planStep(work, TRIAL_STEP_S);
  evaluateBatch(work, plan, lengthS / 2, 1);
  findNearPairs(work, plan, work.searcher.batch.steps[0]);
  const visits = Math.max(1, work.pairs.visits);
  const objectCount = work.primaries.candidates.length + work.others.candidates.length;
  const best = TRIAL_STEP_S * Math.sqrt((OBJECT_COST * objectCount) / visits);
  return STEPS_S.reduce((a, b) => (Math.abs(b - best) < Math.abs(a - best) ? b : a));
}

function evaluateBatch(work: Workspace, plan: StepPlan, firstMiddleS: number, count: number): void {
  const { searcher, cursor, primaries, others } = work;
  evaluateSteps(searcher.batch, cursor, primaries.candidates, firstMiddleS, count, plan.evaluated);
  evaluateSteps(searcher.batch, cursor, others.candidates, firstMiddleS, count, plan.evaluated);
}

function findNearPairs(work: Workspace, plan: StepPlan, step: StepStates): Sweep {
  const { searcher, primaries, others, pairs } = work;
  const { partners, flatOwn, flatLater, flatAround, steepOwn, steepLater, steepAround } = plan;
  const sweep = sweepOf(step, plan.bounds, plan.toleranceKm, pairs);
  pairs.size = 0;
  sortByKind(primaries, step);
  sortByKind(others, step);
  const { flatCount, steepCount, fast, fastCount } = primaries;
  const flat = primaries.sorted.subarray(0, flatCount);
  const steep = primaries.sorted.subarray(flatCount);
  sortByHeight(primaries.flat, flatCount, step.low, flat);
  sortByHeight(primaries.steep, steepCount, step.low, steep);
  fillColumns(flatOwn, flat, flatCount, step, partners.own);
  fillColumns(steepOwn, steep, steepCount, step, partners.own);
  if (searcher.rules.withinPrimaries) {
    fillColumns(flatLater, flat, flatCount, step, partners.earlier);
    fillColumns(steepLater, steep, steepCount, step, partners.earlier);
    findPairsWithin(sweep, flatOwn, flatLater);
    findPairsWithin(sweep, steepOwn, steepLater);
    findPairsAcross(sweep, steepOwn, flatOwn);
    findPairsAcross(sweep, steepOwn, flatLater);
    findPairsAcross(sweep, steepLater, flatOwn);
    findPairsWithColumns(sweep, fast, fastCount, flatOwn, partners.fast);
    findPairsWithColumns(sweep, fast, fastCount, steepOwn, partners.fast);
    findPairsOfLists(sweep, fast, fastCount, fast, fastCount);
  }
  if (others.thereCount === 0) return sweep;
  fillColumns(flatAround, flat, flatCount, step, partners.ordinary);
  fillColumns(steepAround, steep, steepCount, step, partners.ordinary);
  for (const [list, count] of [
    [others.flat, others.flatCount],
    [others.steep, others.steepCount],
  ] as const) {
    findPairsWithColumns(sweep, list, count, flatAround, partners.own);
    findPairsWithColumns(sweep, list, count, steepAround, partners.own);
  }
  findPairsWithColumns(sweep, others.fast, others.fastCount, flatOwn, partners.fast);
  findPairsWithColumns(sweep, others.fast, others.fastCount, steepOwn, partners.fast);
  findPairsOfLists(sweep, fast, fastCount, others.there, others.thereCount);
  return sweep;
}

function sortByKind(side: Side, { kind }: StepStates): void {
  const { candidates, there, flat, steep, fast } = side;
  let thereCount = 0;
  let flatCount = 0;
  let steepCount = 0;
  let fastCount = 0;
  for (let k = 0; k < candidates.length; k++) {
    const object = candidates[k];
    if (kind[object] === ABSENT) continue;
    there[thereCount++] = object;
    if (kind[object] === FLAT) flat[flatCount++] = object;
    else if (kind[object] === STEEP) steep[steepCount++] = object;
    else fast[fastCount++] = object;
  }
  side.thereCount = thereCount;
  side.flatCount = flatCount;
  side.steepCount = steepCount;
  side.fastCount = fastCount;
}

const track = new Float64Array(6);
const relative = new Float64Array(6);

/** Relative state of two tracks, b minus a. */
function relativeOnTracks(cursor: TrackCursor, a: number, b: number, timeS: number): void {
  stateOnTrack(cursor, b, timeS, relative, 0);
  stateOnTrack(cursor, a, timeS, track, 0);
  for (let k = 0; k < 6; k++) relative[k] -= track[k];
}

/** @returns number of pairs that went to SGP4 */
function refinePairs(
  work: Workspace,
  plan: StepPlan,
  { step }: Sweep,
  middleS: number,
  approaches: ClosestApproach[],
): number {
  const { searcher, tracks, pairs } = work;
  const { objects, rules, order } = searcher;
  const { halfStepS, baseReachKm } = plan.bounds;
  const { records, low } = step;
  const middleMs = tracks.startMs + middleS * 1000;
  const fromMs = middleMs - halfStepS * 1000;
  const toMs = middleMs + halfStepS * 1000;
  let refined = 0;
  for (let k = 0; k < pairs.size; k++) {
    const a = pairs.first[k];
    const b = pairs.second[k];
    const first = Math.min(order[a], order[b]);
    const second = Math.max(order[a], order[b]);
    if (rules.skippedPairs.size > 0 && rules.skippedPairs.has(pairKey(first, second, objects.count)))
      continue;
    const i = RECORD_SIZE * a;
    const j = RECORD_SIZE * b;
    const speed = Math.hypot(
      records[j + 3] - records[i + 3],
      records[j + 4] - records[i + 4],
      records[j + 5] - records[i + 5],
    );
    const reachKm = baseReachKm + plan.toleranceKm[a] + plan.toleranceKm[b];
    const toleranceKm = tracks.toleranceKm[a] + tracks.toleranceKm[b];
    const tide = tidePerS2(shellFloorKm(Math.min(low[a], low[b])));
    const farthestKm = farthestInStepKm(halfStepS, reachKm, tide, speed);
    // What eps holds beyond the positions is the error of the tracks' velocities over half a step.
    const speedErrorKmPerS = (plan.toleranceKm[a] + plan.toleranceKm[b] - toleranceKm) / halfStepS;
    const isFast = isConvex(halfStepS, farthestKm, tide, speed - speedErrorKmPerS);
    const guessS = isFast
      ? nearestOnTracks(work, a, b, middleS, halfStepS, toleranceKm)
      : slowestOnTracks(work, a, b, middleS, halfStepS, toleranceKm, speed + tide * farthestKm * halfStepS);
    if (Number.isNaN(guessS)) continue;
    refined++;
    const object1 = refinedObject(work, first, isFast);
    const object2 = refinedObject(work, second, isFast);
    if (isFast) {
      const guessMs = tracks.startMs + guessS * 1000;
      const tcaMs = refineFastTca(object1, object2, guessMs, 2000 * halfStepS, rules.missKm);
      accept(work, first, second, object1, object2, tcaMs, fromMs, toMs, approaches);
    } else {
      for (const tcaMs of slowTcas(object1, object2, fromMs, toMs, SLOW_GRID_MS)) {
        accept(work, first, second, object1, object2, tcaMs, fromMs, toMs, approaches);
      }
    }
  }
  return refined;
}

function refinedObject({ searcher, recent }: Workspace, object: number, isFast: boolean): RefinedObject {
  const { records, epochMs } = searcher.objects;
  const refined = { record: records[object], epochMs: epochMs[object] };
  if (isFast) return refined;
  // Slow pairs are asked for at the same times, and one object is part of many in a train.
  let states = recent.get(object);
  if (states === undefined) {
    states = createRecentStates();
    recent.set(object, states);
  }
  return { ...refined, recent: states };
}

/**
 * Time of the closest approach of two tracks whose distance has one minimum in the step, in seconds after the
 * slab's start; NaN where it is not in the step or too wide to be one within reach on SGP4.
 */
function nearestOnTracks(
  { cursor, searcher, tracks }: Workspace,
  a: number,
  b: number,
  middleS: number,
  halfStepS: number,
  toleranceKm: number,
): number {
  const limitKm = searcher.rules.missKm + toleranceKm;
  let timeS = middleS;
  let distance2 = 0;
  let beyondS = 0;
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
    const segmentS = Math.min(tracks.segmentS[a], tracks.segmentS[b]);
    beyondS = 0.01 + toleranceKm / Math.sqrt(speed2) + (limitKm * 6.5 * toleranceKm) / (segmentS * speed2);
    const reachS = halfStepS + Math.min(beyondS, halfStepS);
    const nextS = timeS - (x * vx + y * vy + z * vz) / speed2;
    const clampedS = Math.max(middleS - reachS, Math.min(middleS + reachS, nextS));
    const done = Math.abs(clampedS - timeS) < 1e-3;
    timeS = clampedS;
    if (done) break;
  }
  return distance2 > limitKm * limitKm ? Number.NaN : timeS;
}

/** NaN where two tracks that are slow against each other stay too far apart all step, else a time in it. */
function slowestOnTracks(
  { cursor, searcher }: Workspace,
  a: number,
  b: number,
  middleS: number,
  halfStepS: number,
  toleranceKm: number,
  fastestKmPerS: number,
): number {
  const steps = Math.max(1, Math.ceil((2 * halfStepS) / SLOW_TRACK_STEP_S));
  const partS = (2 * halfStepS) / steps;
  const limitKm = searcher.rules.missKm + toleranceKm + fastestKmPerS * partS * 0.5;
  for (let k = 0; k < steps; k++) {
    const timeS = middleS - halfStepS + (k + 0.5) * partS;
    relativeOnTracks(cursor, a, b, timeS);
    if (relative[0] ** 2 + relative[1] ** 2 + relative[2] ** 2 <= limitKm * limitKm) return timeS;
  }
  return Number.NaN;
}

function accept(
  work: Workspace,
  first: number,
  second: number,
  object1: RefinedObject,
  object2: RefinedObject,
  tcaMs: number,
  fromMs: number,
  toMs: number,
  approaches: ClosestApproach[],
): void {
  const { objects, rules } = work.searcher;
  if (!(tcaMs >= fromMs - EDGE_MS && tcaMs < toMs + EDGE_MS)) return;
  if (tcaMs < rules.startMs || tcaMs >= rules.endMs) return;
  if (tcaMs < objects.validFromMs[first] || tcaMs >= objects.validToMs[first]) return;
  if (tcaMs < objects.validFromMs[second] || tcaMs >= objects.validToMs[second]) return;
  if (!relativeStateAt(object1, object2, tcaMs, relative)) return;
  const missKm = Math.sqrt(relative[0] ** 2 + relative[1] ** 2 + relative[2] ** 2);
  if (missKm <= rules.missKm) approaches.push({ first, second, tcaMs, missKm });
}
