import { createBulkNodes } from './bulk-nodes.js';
import { gravityAlong } from './gravity.js';
import { SLAB_S } from './node-spacing.js';
import { recordStateAt } from './record-states.js';
import type { Sgp4Records } from './sgp4-records.js';
import { copyState, type MutableTracks } from './slab-tracks.js';

/** Step of the objects that SGP4 may give up on or that break the tolerance still. */
const WATCHED_STEP_S = 60;
const WATCHED_STEP_MS = WATCHED_STEP_S * 1000;
const WATCHED_STEPS = SLAB_S / WATCHED_STEP_S;
const WATCHED_TOLERANCE_KM = 0.2;
/** Steps that a track goes on past the time at which SGP4 fails, for steps that it fails in. */
const COASTING_STEPS = 3;
/** Room that each takes. */
export const NODES_PER_WATCHED = WATCHED_STEPS + 1 + COASTING_STEPS;

/** Number of an object on the tracks, and place of its record. */
export type WatchedObject = { readonly object: number; readonly place: number };

const sample = new Float64Array(6);

/**
 * Lays the tracks of watched objects in short steps, to where SGP4 fails.
 *
 * @param firstNode where there is room for `NODES_PER_WATCHED` nodes of each
 */
export function layWatchedTracks(
  records: Sgp4Records,
  watched: readonly WatchedObject[],
  tracks: MutableTracks,
  firstNode: number,
): void {
  if (watched.length === 0) return;
  const times = WATCHED_STEPS + 1;
  const bulk = createBulkNodes(
    records,
    watched.map(({ place }) => place),
    times,
  );
  const states = bulk.statesAt(Array.from({ length: times }, (_, k) => tracks.startMs + k * WATCHED_STEP_MS));
  const ending: { watchedObject: WatchedObject; lastGood: number }[] = [];
  for (let m = 0; m < watched.length; m++) {
    const { object } = watched[m];
    const node = firstNode + m * NODES_PER_WATCHED;
    tracks.firstNode[object] = node;
    tracks.segmentS[object] = WATCHED_STEP_S;
    tracks.segmentCount[object] = WATCHED_STEPS;
    tracks.originS[object] = 0;
    tracks.toleranceKm[object] = WATCHED_TOLERANCE_KM;
    let alive = 0;
    while (alive < times && copyState(states, m * times + alive, tracks.nodes, node + alive)) alive++;
    if (alive < times) ending.push({ watchedObject: watched[m], lastGood: alive - 1 });
  }
  bulk.dispose();
  for (const { watchedObject, lastGood } of ending) layEndingTrack(records, watchedObject, lastGood, tracks);
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
