import { SLAB_S } from '../ephemeris/node-spacing.js';
import type { SlabTracks } from '../ephemeris/slab-tracks.js';
import { timeBelow } from '../ephemeris/time-below.js';
import {
  type CursorRoom,
  createTrackCursor,
  moveCursor,
  type TrackCursor,
} from '../ephemeris/track-cursor.js';
import { createTrackMaker, type Reach, type TrackMaker } from '../ephemeris/tracks.js';
import { radialAcceleration, type StepBounds, stepBounds, stepToleranceKm } from './bounds.js';
import { cheapestStepS, LONGEST_STEP_S, SHORTEST_STEP_S, TRIAL_STEP_S } from './choose-step.js';
import type { ClosestApproach } from './closest-approach.js';
import { type CellLists, type DirectionCells, directionCells } from './direction-cells.js';
import { goneFromMs } from './gone-objects.js';
import { createNearPairs, listsOf, type NearPairs, sweepStep, takeNearPairs } from './near-pairs.js';
import { refinePairs } from './refine-pairs.js';
import { type SearchObjects, type SearchRules, slabOf } from './search-problem.js';
import { primaryBand } from './sieve.js';
import { type CellRoom, createStepKernel, type StepKernel } from './step-kernel.js';

/** Closest approaches of one slab by a grid of steps. */
export type GridResult = {
  /** In no certain order; some twice. */
  readonly approaches: readonly ClosestApproach[];
  /** Objects that SGP4 gave up on in this slab, with the last millisecond that has a state. */
  readonly failures: readonly { readonly object: number; readonly lastMs: number }[];
  readonly stepS: number;
  readonly worstDefectKm: number;
  readonly pairsRefined: number;
};

/** What single precision rounds away of three components, with room for that of the velocity over a step. */
const RECORD_ROUNDING = 2e-7;
/** Cells that the lists of one cell name, all lists together: some 85 are needed. */
const LISTED_PER_CELL = 128;
const LEAST_LISTED = 65_536;
/** A trial of every so many cells tells the cost of all. */
const TRIED_CELLS = 8;
/** The longest step is the cheapest for so few: a trial would cost more than it can save. */
const FEW_CANDIDATES = 3000;

export type GridSearcher = {
  readonly objects: SearchObjects;
  readonly rules: SearchRules;
  /**
   * Index in `objects` of each object of the search, which numbers them by size of orbit, primaries first:
   * what meets in space then lies close together in memory. Those that are gone at the start are left out.
   */
  readonly order: Int32Array;
  readonly primaryCount: number;
  /** Objects that SGP4 gives no state for at the start of the window. */
  readonly gone: readonly number[];
  readonly trackMaker: TrackMaker;
  /** No track goes farther out, km. */
  readonly farthestKm: Float64Array;
  readonly kernel: StepKernel;
  readonly cursorRoom: CursorRoom;
  readonly pairs: NearPairs;
  /** By the angles that they are laid out for. */
  readonly cellsOf: Map<string, StepCells>;
  /** What the pairs that the kernel hands over are held against. */
  plan: StepPlan;
};

type StepCells = { readonly cells: DirectionCells; readonly lists: readonly CellLists[] };

/** What hangs on the length of a step. */
type StepPlan = {
  readonly bounds: StepBounds;
  /** eps of each object. */
  readonly toleranceKm: Float64Array;
};

/** `loadSgp4` must have been awaited in this thread. */
export function createGridSearcher(objects: SearchObjects, rules: SearchRules): GridSearcher {
  const { eccentricity, perigeeRadiusKm } = objects;
  const axisKm = perigeeRadiusKm.map((radiusKm, i) => radiusKm / (1 - eccentricity[i]));
  const goneMs = Float64Array.from({ length: objects.count }, (_, i) =>
    goneFromMs(objects.records, i, rules.startMs, rules.endMs),
  );
  const indices = Int32Array.from(goneMs.keys());
  const order = indices.filter((i) => goneMs[i] > rules.startMs);
  const count = order.length;
  const primaryCount = order.filter((i) => i < objects.primaryCount).length;
  for (const side of [order.subarray(0, primaryCount), order.subarray(primaryCount)])
    side.sort((a, b) => axisKm[a] - axisKm[b] || a - b);
  const pairs = createNearPairs();
  const kernel = createStepKernel(count, primaryCount, roomOf(rules), (handed) =>
    takeNearPairs(pairs, handed, kernel.records, searcher.plan.bounds, searcher.plan.toleranceKm),
  );
  order.forEach((i, k) => {
    kernel.curvature[k] = radialAcceleration(eccentricity[i], perigeeRadiusKm[i]);
  });
  const searcher: GridSearcher = {
    objects,
    rules,
    order,
    primaryCount,
    gone: [...indices.filter((i) => goneMs[i] <= rules.startMs)],
    farthestKm: Float64Array.from(order, (i) => 1.02 * axisKm[i] * (1 + eccentricity[i]) + 100),
    kernel,
    cursorRoom: {
      coefficients: kernel.coefficients,
      segmentStartS: kernel.segmentStartS,
      segmentEndS: new Float64Array(count),
    },
    pairs,
    cellsOf: new Map(),
    plan: { bounds: stepBounds(rules.missKm, SHORTEST_STEP_S / 2, 0), toleranceKm: new Float64Array(0) },
    trackMaker: createTrackMaker(
      objects.records,
      Array.from(order, (i) => ({
        place: i,
        eccentricity: eccentricity[i],
        perigeeRadiusKm: perigeeRadiusKm[i],
        goneFromMs: goneMs[i],
      })),
      reachOf(objects, rules, order, primaryCount),
    ),
  };
  return searcher;
}

/** Others matter while they can be as low as any primary; `undefined` where all objects are primaries. */
function reachOf(
  { records, epochMs }: SearchObjects,
  rules: SearchRules,
  order: Int32Array,
  primaryCount: number,
): Reach | undefined {
  if (primaryCount === order.length) return undefined;
  const { startMs, endMs, missKm } = rules;
  let ceilingKm = 0;
  for (const i of order.subarray(0, primaryCount)) {
    const band = primaryBand({ records, place: i }, epochMs[i], startMs, endMs);
    ceilingKm = Math.max(ceilingKm, (band?.highKm ?? Number.POSITIVE_INFINITY) + missKm);
  }
  const spanOf = (object: number, slabStartMs: number) => {
    if (object < primaryCount) return { fromS: 0, toS: SLAB_S };
    const found = timeBelow(records, order[object], ceilingKm, slabStartMs, slabStartMs + SLAB_S * 1000);
    if (found === undefined) return undefined;
    return { fromS: (found.fromMs - slabStartMs) / 1000, toS: (found.toMs - slabStartMs) / 1000 };
  };
  // Tracks are asked for from the middle of a step on, up to a step away from it.
  return { spanOf, marginS: 1.5 * (rules.stepS ?? LONGEST_STEP_S) };
}

/** The finest cells are those of the shortest step and of tracks without error. */
function roomOf({ missKm, stepS = SHORTEST_STEP_S }: SearchRules): CellRoom {
  const { ordinaryAngle } = stepBounds(missKm, Math.min(stepS, TRIAL_STEP_S) / 2, 0);
  const { count, firstCell } = directionCells(ordinaryAngle);
  return { cells: count, rows: firstCell.length, listed: LEAST_LISTED + LISTED_PER_CELL * count };
}

/** Finds every closest approach of one slab of the window. */
export function searchGrid(searcher: GridSearcher, slabIndex: number): GridResult {
  const { rules, kernel, pairs } = searcher;
  const { startMs: slabStartMs, lengthS } = slabOf(rules, slabIndex);
  const tracks = searcher.trackMaker.tracksOf(slabStartMs, slabIndex);
  const work = readySlab(searcher, tracks, lengthS);
  const stepS = rules.stepS ?? chooseStep(searcher, work, lengthS);
  const { bounds, toleranceKm } = planStep(searcher, work, stepS);
  const refiner = { ...searcher, cursor: work.cursor, bounds, toleranceKm, samples: new Map() };
  const approaches: ClosestApproach[] = [];
  let pairsRefined = 0;
  for (let k = 0; k < Math.ceil(lengthS / stepS); k++) {
    const middleS = (k + 0.5) * stepS;
    findNearPairs(searcher, work, middleS);
    pairsRefined += refinePairs(refiner, pairs, kernel.records, middleS, approaches);
  }
  return {
    approaches,
    failures: failuresOf(searcher, tracks, lengthS),
    stepS,
    worstDefectKm: tracks.worstDefectKm,
    pairsRefined,
  };
}

function failuresOf(
  { objects, rules, order, gone }: GridSearcher,
  { startMs, endS }: SlabTracks,
  lengthS: number,
): GridResult['failures'] {
  const failures = gone.map((object) => ({ object, lastMs: rules.startMs }));
  order.forEach((object, k) => {
    const lastMs = startMs + endS[k] * 1000;
    // A failure outside of the object's own time or past the window's end is none.
    if (endS[k] < lengthS && lastMs < objects.validToMs[object]) failures.push({ object, lastMs });
  });
  return failures.sort((a, b) => a.object - b.object);
}

/** What is laid out once for a slab. */
type SlabWork = {
  readonly cursor: TrackCursor;
  /** How many of the kernel's candidates may meet something in the slab: primaries, then others. */
  readonly candidateCount: number;
  readonly hasOthers: boolean;
};

function readySlab(searcher: GridSearcher, tracks: SlabTracks, lengthS: number): SlabWork {
  const { objects, order, primaryCount, kernel, cursorRoom } = searcher;
  const { fromS, toS, candidates } = kernel;
  kernel.segmentS.set(tracks.segmentS);
  order.forEach((i, k) => {
    fromS[k] = Math.max(tracks.fromS[k], (objects.validFromMs[i] - tracks.startMs) / 1000);
    toS[k] = Math.min(tracks.toS[k], tracks.endS[k], (objects.validToMs[i] - tracks.startMs) / 1000);
  });
  const there = Int32Array.from(order.keys()).filter(
    (k) => tracks.segmentCount[k] > 0 && fromS[k] < lengthS && toS[k] > 0 && fromS[k] < toS[k],
  );
  const primaries = there.filter((k) => k < primaryCount);
  const others = withinHeights(searcher, tracks, primaries, there.subarray(primaries.length));
  candidates.set(primaries);
  candidates.set(others, primaries.length);
  return {
    cursor: createTrackCursor(tracks, cursorRoom),
    candidateCount: primaries.length + others.length,
    hasOthers: others.length > 0,
  };
}

/** Those of the others whose heights over the slab come within reach of any primary's. */
function withinHeights(
  { rules, kernel }: GridSearcher,
  tracks: SlabTracks,
  primaries: Int32Array,
  others: Int32Array,
): Int32Array {
  if (others.length === 0 || primaries.length === 0) return others.subarray(0, 0);
  const reachKm = rules.missKm + 1;
  let bottom = Number.POSITIVE_INFINITY;
  let top = 0;
  for (const object of primaries) {
    const [low, high] = radiusRange(kernel.curvature[object], tracks, object);
    bottom = Math.min(bottom, low);
    top = Math.max(top, high);
  }
  return others.filter((object) => {
    const [low, high] = radiusRange(kernel.curvature[object], tracks, object);
    return low - reachKm <= top && high + reachKm >= bottom;
  });
}

/** Radii that a track stays within over the slab: those of its nodes, and A h^2 / 8 for the arcs between them. */
function radiusRange(curvature: number, tracks: SlabTracks, object: number): [number, number] {
  const { nodes, segmentS } = tracks;
  let low2 = Number.POSITIVE_INFINITY;
  let high2 = 0;
  const first = 6 * tracks.firstNode[object];
  for (let at = first; at <= first + 6 * tracks.segmentCount[object]; at += 6) {
    const radius2 = nodes[at] * nodes[at] + nodes[at + 1] * nodes[at + 1] + nodes[at + 2] * nodes[at + 2];
    low2 = Math.min(low2, radius2);
    high2 = Math.max(high2, radius2);
  }
  const swing = (curvature * segmentS[object] * segmentS[object]) / 8 + tracks.toleranceKm[object];
  return [Math.sqrt(low2) - swing, Math.sqrt(high2) + swing];
}

/** Readies the searcher and its kernel for steps of one length. */
function planStep(searcher: GridSearcher, { cursor, candidateCount }: SlabWork, stepS: number): StepPlan {
  const { rules, farthestKm, kernel } = searcher;
  const { tracks } = cursor;
  const halfStepS = stepS / 2;
  const toleranceKm = tracks.toleranceKm.map(
    (tolerance, k) =>
      stepToleranceKm(tolerance, tracks.segmentS[k], halfStepS) + RECORD_ROUNDING * farthestKm[k],
  );
  let widestKm = 0;
  for (let k = 0; k < candidateCount; k++) widestKm = Math.max(widestKm, toleranceKm[kernel.candidates[k]]);
  const bounds = stepBounds(rules.missKm, halfStepS, widestKm);
  const { cells, lists } = cellsFor(searcher, bounds);
  kernel.layCells(cells, lists);
  for (let k = 0; k < toleranceKm.length; k++) kernel.marginKm[k] = bounds.baseReachKm / 2 + toleranceKm[k];
  searcher.plan = { bounds, toleranceKm };
  return searcher.plan;
}

/** Slabs take the same few steps over and over. */
function cellsFor({ cellsOf }: GridSearcher, bounds: StepBounds): StepCells {
  const { ordinaryAngle, fastestAngle } = bounds;
  const key = `${ordinaryAngle} ${fastestAngle}`;
  let found = cellsOf.get(key);
  if (found === undefined) {
    const cells = directionCells(ordinaryAngle);
    found = { cells, lists: listsOf(cells, bounds) };
    cellsOf.set(key, found);
  }
  return found;
}

function chooseStep(searcher: GridSearcher, work: SlabWork, lengthS: number): number {
  if (work.candidateCount <= FEW_CANDIDATES) return LONGEST_STEP_S;
  planStep(searcher, work, TRIAL_STEP_S);
  searcher.kernel.takeVisits();
  findNearPairs(searcher, work, Math.min(TRIAL_STEP_S, lengthS) / 2, TRIED_CELLS);
  return cheapestStepS(work.candidateCount, TRIED_CELLS * searcher.kernel.takeVisits());
}

function findNearPairs(searcher: GridSearcher, work: SlabWork, middleS: number, every = 1): void {
  const { kernel, pairs, rules, plan } = searcher;
  const { cursor, candidateCount, hasOthers } = work;
  bringCursor(cursor, kernel.candidates, candidateCount, middleS);
  kernel.evaluate(candidateCount, middleS, plan.bounds.halfStepS);
  pairs.size = 0;
  sweepStep(kernel, plan.bounds, rules.withinPrimaries, hasOthers, every);
}

/** Brings the segments of all candidates to the time. */
function bringCursor(cursor: TrackCursor, candidates: Int32Array, count: number, timeS: number): void {
  const { segmentStartS, segmentEndS } = cursor;
  for (let k = 0; k < count; k++) {
    const object = candidates[k];
    if (timeS >= segmentEndS[object] || timeS < segmentStartS[object]) moveCursor(cursor, object, timeS);
  }
}
