import { createBulkNodes } from './bulk-nodes.js';
import { gravityAlong } from './gravity.js';
import { SLAB_S } from './node-spacing.js';
import { recordStateAt } from './record-states.js';
import { defectAtKm, MEASURED_PART } from './segment-defect.js';
import type { Sgp4Records } from './sgp4-records.js';
import { copyState, type MutableTracks, WIDEST_TOLERANCE_KM } from './slab-tracks.js';

/** Step of the objects that SGP4 may give up on or that break the tolerance still. */
const WATCHED_STEP_S = 60;
const WATCHED_STEP_MS = WATCHED_STEP_S * 1000;
const WATCHED_STEPS = SLAB_S / WATCHED_STEP_S;
const WATCHED_TOLERANCE_KM = 0.2;
/** Segments that are measured: a perigee takes more than one. */
const MEASURED = Array.from({ length: WATCHED_STEPS / 6 }, (_, k) => 6 * k);
const TIMES = WATCHED_STEPS + 1 + MEASURED.length;
/** Half the base of a difference of positions. */
const RATE_MS = 250;
const RATE_S = RATE_MS / 1000;
/** Velocities that are this far from the rates of the positions would use up half of the tolerance, km/s. */
const UNEVEN_KM_PER_S = 0.008;
/** Steps that a track goes on past the time at which SGP4 fails, for steps that it fails in. */
const COASTING_STEPS = 3;
/** Room that each takes. */
export const NODES_PER_WATCHED = WATCHED_STEPS + 1 + COASTING_STEPS;

/** Number of an object on the tracks, and place of its record. */
export type WatchedObject = { readonly object: number; readonly place: number };

const sample = new Float64Array(6);
const before = new Float64Array(6);
const after = new Float64Array(6);

/**
 * Lays the tracks of watched objects in short steps, to where SGP4 fails.
 *
 * @param firstNode where there is room for `NODES_PER_WATCHED` nodes of each
 * @param marginS by how much tracks go on beyond the time in which they count
 */
export function layWatchedTracks(
  records: Sgp4Records,
  watched: readonly WatchedObject[],
  tracks: MutableTracks,
  firstNode: number,
  marginS: number,
): void {
  if (watched.length === 0) return;
  const { startMs } = tracks;
  const bulk = createBulkNodes(
    records,
    watched.map(({ place }) => place),
    TIMES,
  );
  const states = bulk.statesAt([
    ...Array.from({ length: WATCHED_STEPS + 1 }, (_, k) => startMs + k * WATCHED_STEP_MS),
    ...MEASURED.map((k) => startMs + (k + MEASURED_PART) * WATCHED_STEP_MS),
  ]);
  const ending: { watchedObject: WatchedObject; lastGood: number }[] = [];
  const uneven: WatchedObject[] = [];
  for (const [m, watchedObject] of watched.entries()) {
    const { object } = watchedObject;
    const node = firstNode + m * NODES_PER_WATCHED;
    const base = m * TIMES;
    tracks.firstNode[object] = node;
    tracks.segmentS[object] = WATCHED_STEP_S;
    tracks.segmentCount[object] = WATCHED_STEPS;
    tracks.originS[object] = 0;
    tracks.toleranceKm[object] = WATCHED_TOLERANCE_KM;
    let alive = 0;
    while (alive <= WATCHED_STEPS && copyState(states, base + alive, tracks.nodes, node + alive)) alive++;
    if (alive <= WATCHED_STEPS) ending.push({ watchedObject, lastGood: alive - 1 });
    else {
      const first = base + WATCHED_STEPS + 1;
      const isWide = MEASURED.some(
        (k, n) =>
          defectAtKm(tracks.nodes, node + k, WATCHED_STEP_S, states.position, first + n) >
          WATCHED_TOLERANCE_KM / 2,
      );
      if (isWide) uneven.push(watchedObject);
    }
  }
  bulk.dispose();
  for (const { object, place } of uneven) {
    // Only where it counts: an eccentric orbit is high for hours.
    const first = Math.max(0, Math.floor((tracks.fromS[object] - marginS) / WATCHED_STEP_S));
    const last = Math.min(WATCHED_STEPS, Math.ceil((tracks.toS[object] + marginS) / WATCHED_STEP_S));
    const stretch: Stretch = {
      firstNode: tracks.firstNode[object] + first,
      segments: last - first,
      startMs: startMs + first * WATCHED_STEP_MS,
    };
    const measured = MEASURED.filter((k) => k >= first && k < last).map((k) => k - first);
    takeRatesOfPositions(records, place, tracks.nodes, stretch);
    tracks.toleranceKm[object] = toleranceOf(records, place, tracks.nodes, stretch, measured);
  }
  for (const { watchedObject, lastGood } of ending) layEndingTrack(records, watchedObject, lastGood, tracks);
}

/** Segments of a track one after the other. */
type Stretch = { readonly firstNode: number; readonly segments: number; readonly startMs: number };

/**
 * Puts the rates of the positions in place of SGP4's velocities: for elements that are years old and low at
 * perigee these are up to kilometers a second apart.
 */
function takeRatesOfPositions(
  records: Sgp4Records,
  place: number,
  nodes: Float64Array,
  { firstNode, segments, startMs }: Stretch,
): void {
  for (let k = 0; k <= segments; k++) {
    if (!rateAt(records, place, startMs + k * WATCHED_STEP_MS, rate)) continue;
    for (let axis = 0; axis < 3; axis++) nodes[6 * (firstNode + k) + 3 + axis] = rate[axis];
  }
}

/**
 * Tolerance of a track with the rates of positions. What is left are accelerations that no gravity explains, below
 * ground for the most part: beyond the widest tolerance such elements are not followed truly.
 *
 * @param measured numbers of the segments that are measured
 */
function toleranceOf(
  records: Sgp4Records,
  place: number,
  nodes: Float64Array,
  { firstNode, startMs }: Stretch,
  measured: readonly number[],
): number {
  let worstKm = 0;
  for (const k of measured) {
    if (!recordStateAt(records, place, startMs + (k + MEASURED_PART) * WATCHED_STEP_MS, sample)) continue;
    worstKm = Math.max(worstKm, defectAtKm(nodes, firstNode + k, WATCHED_STEP_S, sample, 0));
  }
  return Math.min(WIDEST_TOLERANCE_KM, Math.max(WATCHED_TOLERANCE_KM, 2 * worstKm));
}

const rate = new Float64Array(3);

/** Whether the velocity of a node is far from the rate of the positions there. */
function isUneven(
  records: Sgp4Records,
  place: number,
  nodes: Float64Array,
  node: number,
  timeMs: number,
): boolean {
  if (!rateAt(records, place, timeMs, rate)) return false;
  const [x, y, z] = [0, 1, 2].map((axis) => nodes[6 * node + 3 + axis] - rate[axis]);
  return Math.hypot(x, y, z) > UNEVEN_KM_PER_S;
}

/**
 * Rate of the positions, km/s, by central differences, at the end of SGP4's states by those to one side.
 *
 * @returns false where there are not enough states
 */
function rateAt(records: Sgp4Records, place: number, timeMs: number, out: Float64Array): boolean {
  const isLast = !recordStateAt(records, place, timeMs + RATE_MS, after);
  if (!recordStateAt(records, place, timeMs - RATE_MS, before)) return false;
  if (!isLast) {
    for (let axis = 0; axis < 3; axis++) out[axis] = (after[axis] - before[axis]) / (2 * RATE_S);
    return true;
  }
  if (!recordStateAt(records, place, timeMs, after)) return false;
  if (!recordStateAt(records, place, timeMs - 2 * RATE_MS, sample)) return false;
  for (let axis = 0; axis < 3; axis++) {
    out[axis] = (3 * after[axis] - 4 * before[axis] + sample[axis]) / (2 * RATE_S);
  }
  return true;
}

/**
 * Finds the millisecond at which SGP4 fails and lays the nodes again so that the last segment ends there.
 *
 * @param lastGood number of the last watched step that has a state
 */
function layEndingTrack(
  records: Sgp4Records,
  { object, place }: WatchedObject,
  lastGood: number,
  tracks: MutableTracks,
): void {
  tracks.segmentCount[object] = 0;
  tracks.endS[object] = 0;
  if (lastGood < 0) return;
  let goodMs = tracks.startMs + lastGood * WATCHED_STEP_MS;
  let badMs = goodMs + WATCHED_STEP_MS;
  while (badMs - goodMs > 1) {
    const middleMs = Math.floor((goodMs + badMs) / 2);
    if (recordStateAt(records, place, middleMs, sample)) goodMs = middleMs;
    else badMs = middleMs;
  }
  const lastS = (goodMs - tracks.startMs) / 1000;
  const segments = Math.max(1, Math.ceil(lastS / WATCHED_STEP_S));
  const bulk = createBulkNodes(records, [place], segments);
  const states = bulk.statesAt(
    Array.from({ length: segments }, (_, k) => goodMs - (segments - k) * WATCHED_STEP_MS),
  );
  const firstNode = tracks.firstNode[object];
  let complete = recordStateAt(records, place, goodMs, tracks.nodes, 6 * (firstNode + segments));
  for (let k = 0; k < segments; k++) {
    if (!copyState(states, k, tracks.nodes, firstNode + k)) complete = false;
  }
  bulk.dispose();
  // Where there is no state before the slab either, there is nothing to draw a path of seconds from.
  if (!complete) return;
  if (isUneven(records, place, tracks.nodes, firstNode + segments, goodMs)) {
    const stretch: Stretch = { firstNode, segments, startMs: goodMs - segments * WATCHED_STEP_MS };
    takeRatesOfPositions(records, place, tracks.nodes, stretch);
    tracks.toleranceKm[object] = toleranceOf(records, place, tracks.nodes, stretch, [
      ...Array(segments).keys(),
    ]);
  }
  for (let k = 0; k < COASTING_STEPS; k++) coast(tracks.nodes, firstNode + segments + k);
  tracks.segmentCount[object] = segments + COASTING_STEPS;
  tracks.endS[object] = lastS;
  tracks.originS[object] = lastS - segments * WATCHED_STEP_S;
}

const rates = new Float64Array(6);

/** Lays the node after a node one watched step further along its path under gravity: a Taylor series. */
function coast(nodes: Float64Array, node: number): void {
  const from = 6 * node;
  nodes.copyWithin(from + 6, from, from + 6);
  const parts = 12;
  const h = WATCHED_STEP_S / parts;
  for (let part = 0; part < parts; part++) {
    gravityAlong(nodes, from + 6, rates);
    for (let axis = 0; axis < 3; axis++) {
      const at = from + 6 + axis;
      nodes[at] += h * (nodes[at + 3] + h * (rates[axis] / 2 + (h * rates[3 + axis]) / 6));
      nodes[at + 3] += h * (rates[axis] + (h * rates[3 + axis]) / 2);
    }
  }
}
