import { SLAB_S } from '../ephemeris/node-spacing.js';
import { createTrackCursor, stateOnTrack, type TrackCursor } from '../ephemeris/track-cursor.js';
import { createTrackMaker, type SlabTracks, type TrackMaker, trackToleranceKm } from '../ephemeris/tracks.js';
import { radialAcceleration, type StepBounds, stepBounds, tidePerS2 } from './bounds.js';
import { createDirectionGrid, type DirectionGrid, fillDirectionGrid } from './direction-grid.js';
import {
  createNearPairs,
  findPairsBetween,
  findPairsWithin,
  markOccupied,
  type NearPairs,
} from './near-pairs.js';
import { type RefinedObject, refineFastTca, relativeStateAt, slowTcas } from './refine.js';
import { pairKey, type SearchObjects, type SearchRules } from './search-problem.js';
import { createStepStates, evaluateStep, RECORD_SIZE, type StepStates } from './step-states.js';

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
const STEPS_S = [20, 24, 30, 36, 40, 48, 60, 72, 80, 90, 96, 120, 150, 160, 180];
/** Cost of stepping an object against that of looking at a pair: sets the step, not the result. */
const OBJECT_COST = 16;
const TRIAL_STEP_S = 120;
/** Grid of the sign changes of a slow pair. */
const SLOW_GRID_MS = 20_000;
/** A refined TCA is taken by the step that holds it; this much over its edges covers rounding. */
const EDGE_MS = 0.01;

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
  readonly makeTracks: TrackMaker;
  readonly curvature: Float64Array;
  readonly toleranceKm: Float64Array;
};

/** Number of slabs of a window. */
export function slabCount({ startMs, endMs }: Pick<SearchRules, 'startMs' | 'endMs'>): number {
  return Math.ceil((endMs - startMs) / (SLAB_S * 1000));
}

/** `loadBulkPropagator` must have been awaited in this thread. */
export function createSlabSearcher(objects: SearchObjects, rules: SearchRules): SlabSearcher {
  const curvature = new Float64Array(objects.count);
  const toleranceKm = new Float64Array(objects.count);
  for (let i = 0; i < objects.count; i++) {
    curvature[i] = radialAcceleration(objects.eccentricity[i], objects.perigeeRadiusKm[i]);
    toleranceKm[i] = trackToleranceKm(objects.eccentricity[i]);
  }
  const makeTracks = createTrackMaker(
    objects.records.map((record, i) => ({
      record,
      epochMs: objects.epochMs[i],
      eccentricity: objects.eccentricity[i],
      perigeeRadiusKm: objects.perigeeRadiusKm[i],
    })),
  );
  return { objects, rules, makeTracks, curvature, toleranceKm };
}

type Workspace = {
  readonly searcher: SlabSearcher;
  readonly tracks: SlabTracks;
  readonly cursor: TrackCursor;
  readonly step: StepStates;
  /** Objects alive in the current step: primaries, then others, then the primaries by speed of turning. */
  readonly primaries: Int32Array;
  readonly others: Int32Array;
  readonly ordinary: Int32Array;
  readonly fast: Int32Array;
  readonly pairs: NearPairs;
};

/** Finds every closest approach of one slab of the window. */
export function searchSlab(searcher: SlabSearcher, slabIndex: number): SlabResult {
  const { objects, rules } = searcher;
  const slabStartMs = rules.startMs + slabIndex * SLAB_S * 1000;
  const lengthS = Math.min(SLAB_S, (rules.endMs - slabStartMs) / 1000);
  const tracks = searcher.makeTracks(slabStartMs, slabIndex);
  const failures: { object: number; lastMs: number }[] = [];
  for (let i = 0; i < objects.count; i++) {
    const lastMs = slabStartMs + tracks.endS[i] * 1000;
    // A failure outside of the object's own time or past the window's end is none.
    if (tracks.endS[i] < lengthS && lastMs < objects.validToMs[i]) failures.push({ object: i, lastMs });
  }
  const work: Workspace = {
    searcher,
    tracks,
    cursor: createTrackCursor(tracks),
    step: createStepStates(objects.count),
    primaries: new Int32Array(objects.primaryCount),
    others: new Int32Array(objects.count - objects.primaryCount),
    ordinary: new Int32Array(objects.primaryCount),
    fast: new Int32Array(objects.primaryCount),
    pairs: createNearPairs(),
  };
  const stepS = chooseStep(work, lengthS);
  const bounds = stepBounds(rules.missKm, stepS / 2);
  const grid = createDirectionGrid(objects.primaryCount, bounds.directionReach);
  const occupied = new Uint8Array(grid.cellStart.length - 1);
  const approaches: ClosestApproach[] = [];
  let pairsRefined = 0;
  const stepCount = Math.ceil(lengthS / stepS);
  for (let k = 0; k < stepCount; k++) {
    const middleS = (k + 0.5) * stepS;
    work.pairs.size = 0;
    findNearPairs(work, bounds, grid, occupied, middleS);
    pairsRefined += refinePairs(work, bounds, middleS, approaches);
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

/**
 * The step that costs least: looking at pairs grows with the square of the step (the area that a cell
 * covers), stepping the objects falls with it. It depends on the objects alone, so that the work is the same
 * on every machine.
 */
function chooseStep(work: Workspace, lengthS: number): number {
  const bounds = stepBounds(work.searcher.rules.missKm, TRIAL_STEP_S / 2);
  const grid = createDirectionGrid(work.searcher.objects.primaryCount, bounds.directionReach);
  const occupied = new Uint8Array(grid.cellStart.length - 1);
  findNearPairs(work, bounds, grid, occupied, Math.min(lengthS, SLAB_S) / 2);
  const visits = Math.max(1, work.pairs.visits);
  work.pairs.visits = 0;
  const best = TRIAL_STEP_S * Math.sqrt((OBJECT_COST * work.searcher.objects.count) / visits);
  return STEPS_S.reduce((a, b) => (Math.abs(b - best) < Math.abs(a - best) ? b : a));
}

function findNearPairs(
  work: Workspace,
  bounds: StepBounds,
  grid: DirectionGrid,
  occupied: Uint8Array,
  middleS: number,
): void {
  const { searcher, tracks, step, primaries, others, ordinary, fast } = work;
  const { objects, rules } = searcher;
  const fromS = middleS - bounds.halfStepS;
  const toMs = tracks.startMs + (middleS + bounds.halfStepS) * 1000;
  const fromMs = tracks.startMs + fromS * 1000;
  const alive = (object: number) =>
    tracks.endS[object] > fromS && objects.validFromMs[object] < toMs && objects.validToMs[object] > fromMs;
  let primaryCount = 0;
  for (let i = 0; i < objects.primaryCount; i++) if (alive(i)) primaries[primaryCount++] = i;
  if (primaryCount === 0) return;
  evaluateStep(
    step,
    work.cursor,
    primaries,
    primaryCount,
    middleS,
    bounds,
    grid.cells,
    searcher.curvature,
    searcher.toleranceKm,
  );
  let ordinaryCount = 0;
  let fastCount = 0;
  let bottom = Number.POSITIVE_INFINITY;
  let top = Number.NEGATIVE_INFINITY;
  for (let k = 0; k < primaryCount; k++) {
    const object = primaries[k];
    if (step.fast[object] === 0) ordinary[ordinaryCount++] = object;
    else fast[fastCount++] = object;
    if (step.low[object] < bottom) bottom = step.low[object];
    if (step.high[object] > top) top = step.high[object];
  }
  fillDirectionGrid(grid, ordinary, ordinaryCount, step);
  if (rules.withinPrimaries) findPairsWithin(step, bounds, grid, fast, fastCount, work.pairs);
  if (others.length === 0) return;
  let otherCount = 0;
  for (let i = objects.primaryCount; i < objects.count; i++) if (alive(i)) others[otherCount++] = i;
  evaluateStep(
    step,
    work.cursor,
    others,
    otherCount,
    middleS,
    bounds,
    grid.cells,
    searcher.curvature,
    searcher.toleranceKm,
  );
  let within = 0;
  for (let k = 0; k < otherCount; k++) {
    const object = others[k];
    if (step.low[object] <= top && step.high[object] >= bottom) others[within++] = object;
  }
  markOccupied(grid, occupied);
  findPairsBetween(step, bounds, grid, fast, fastCount, others, within, occupied, work.pairs);
}

const track1 = new Float64Array(6);
const track2 = new Float64Array(6);
const relative = new Float64Array(6);

/** @returns number of pairs that went to SGP4 */
function refinePairs(
  work: Workspace,
  bounds: StepBounds,
  middleS: number,
  approaches: ClosestApproach[],
): number {
  const { searcher, tracks, step, pairs, cursor } = work;
  const { objects, rules } = searcher;
  const halfStepS = bounds.halfStepS;
  const middleMs = tracks.startMs + middleS * 1000;
  const fromMs = middleMs - halfStepS * 1000;
  const toMs = middleMs + halfStepS * 1000;
  let refined = 0;
  for (let k = 0; k < pairs.size; k++) {
    const first = pairs.first[k];
    const second = pairs.second[k];
    if (rules.skippedPairs.has(pairKey(first, second, objects.count))) continue;
    const i = RECORD_SIZE * first;
    const j = RECORD_SIZE * second;
    const speed = Math.hypot(
      step.records[j + 3] - step.records[i + 3],
      step.records[j + 4] - step.records[i + 4],
      step.records[j + 5] - step.records[i + 5],
    );
    const tide = tidePerS2(Math.min(step.records[i + 6], step.records[j + 6]));
    const tolerance = searcher.toleranceKm[first] + searcher.toleranceKm[second];
    const farthest = bounds.baseReachKm + tolerance + 2 * speed * halfStepS;
    const object1: RefinedObject = { record: objects.records[first], epochMs: objects.epochMs[first] };
    const object2: RefinedObject = { record: objects.records[second], epochMs: objects.epochMs[second] };
    // The distance is convex over the step where speed^2 outweighs the tide by far.
    if (speed * speed > 4 * tide * farthest * farthest) {
      let s = middleS;
      let distance2 = 0;
      for (let iteration = 0; iteration < 8; iteration++) {
        stateOnTrack(cursor, first, s, track1, 0);
        stateOnTrack(cursor, second, s, track2, 0);
        const x = track2[0] - track1[0];
        const y = track2[1] - track1[1];
        const z = track2[2] - track1[2];
        const vx = track2[3] - track1[3];
        const vy = track2[4] - track1[4];
        const vz = track2[5] - track1[5];
        distance2 = x * x + y * y + z * z;
        const next = s - (x * vx + y * vy + z * vz) / (vx * vx + vy * vy + vz * vz);
        const clamped = Math.max(middleS - halfStepS, Math.min(middleS + halfStepS, next));
        const done = Math.abs(clamped - s) < 1e-3;
        s = clamped;
        if (done) break;
      }
      const limit = rules.missKm + tolerance;
      if (distance2 > limit * limit) continue;
      refined++;
      const tcaMs = refineFastTca(object1, object2, tracks.startMs + s * 1000, 2000 * halfStepS);
      accept(work, first, second, object1, object2, tcaMs, fromMs, toMs, approaches);
    } else {
      refined++;
      for (const tcaMs of slowTcas(object1, object2, fromMs, toMs, SLOW_GRID_MS)) {
        accept(work, first, second, object1, object2, tcaMs, fromMs, toMs, approaches);
      }
    }
  }
  return refined;
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
