import type { SatRec } from 'satellite.js';
import { type BulkNodes, createBulkNodes } from './bulk-nodes.js';
import { EARTH_MU_KM3_PER_S2, EARTH_RADIUS_KM } from './gravity.js';
import { SLAB_S, segmentsPerSlab } from './node-spacing.js';
import { evaluateSegment, fitSegment, SEGMENT_SIZE } from './septic.js';
import { sgp4StateAt } from './sgp4-state.js';

/**
 * How far an interpolated position may lie from SGP4's. Interpolation alone is good to some tens of meters,
 * but SGP4's velocity is not exactly the derivative of its position, by up to some m/s in eccentric orbits.
 * The segments that are measured in every slab must be within half of this; an object that is not is
 * stepped with SGP4.
 *
 * @param eccentricity mean eccentricity
 */
export function trackToleranceKm(eccentricity: number): number {
  return eccentricity < 0.01 ? 0.2 : WIDEST_TOLERANCE_KM;
}

export const WIDEST_TOLERANCE_KM = 1;

/** Step of the objects that need watching: those that dip deep into the atmosphere or break the tolerance. */
const WATCHED_STEP_S = 60;
/** Below this height SGP4 may give up between two nodes. */
const WATCHED_PERIGEE_KM = EARTH_RADIUS_KM + 90;
/** Groups with more segments hold eccentric orbits, which are worst near perigee: measure all their segments. */
const MOST_SEGMENTS_SAMPLED = 12;

export type TrackedObject = {
  readonly record: SatRec;
  readonly epochMs: number;
  readonly eccentricity: number;
  readonly perigeeRadiusKm: number;
};

/** The objects' paths through one slab, as chains of segments between SGP4 nodes. */
export type SlabTracks = {
  readonly startMs: number;
  /** Six doubles a node: km and km/s, TEME. */
  readonly nodes: Float64Array;
  /** First node of each object; its segments join consecutive nodes. */
  readonly firstNode: Int32Array;
  readonly segmentCount: Int32Array;
  readonly segmentS: Float64Array;
  /** Where the first segment starts, seconds after the slab's start. */
  readonly originS: Float64Array;
  /** Seconds after the slab's start up to which SGP4 gives states; `SLAB_S` for an object that lives on. */
  readonly endS: Float64Array;
  /** Largest distance measured between a segment and SGP4, of the objects that were not stepped. */
  readonly worstDefectKm: number;
  /** Number of objects that were stepped with SGP4 because they needed watching. */
  readonly watchedCount: number;
};

/** Makes the tracks of a slab; objects keep the order in which they were given. */
export type TrackMaker = (slabStartMs: number, slabIndex: number) => SlabTracks;

type Group = { readonly members: Int32Array; readonly segments: number; readonly bulk: BulkNodes };

/**
 * Groups the objects by node spacing and hands their records to the bulk propagator once.
 * `loadBulkPropagator` must have been awaited in this thread.
 */
export function createTrackMaker(objects: readonly TrackedObject[]): TrackMaker {
  const bySegments = new Map<number, number[]>();
  objects.forEach((object, index) => {
    const segments = segmentsPerSlab(object.eccentricity, object.perigeeRadiusKm);
    const members = bySegments.get(segments);
    if (members === undefined) bySegments.set(segments, [index]);
    else members.push(index);
  });
  const groups: Group[] = [...bySegments]
    .sort(([a], [b]) => a - b)
    .map(([segments, members]) => ({
      segments,
      members: Int32Array.from(members),
      bulk: createBulkNodes(
        members.map((index) => objects[index].record),
        2 * segments + 1,
      ),
    }));
  return (slabStartMs, slabIndex) => makeTracks(objects, groups, slabStartMs, slabIndex);
}

function makeTracks(
  objects: readonly TrackedObject[],
  groups: readonly Group[],
  slabStartMs: number,
  slabIndex: number,
): SlabTracks {
  const count = objects.length;
  const firstNode = new Int32Array(count);
  const segmentCount = new Int32Array(count);
  const segmentS = new Float64Array(count);
  const originS = new Float64Array(count);
  const endS = new Float64Array(count).fill(SLAB_S);
  const bulkNodeCount = groups.reduce(
    (sum, { members, segments }) => sum + members.length * (segments + 1),
    0,
  );
  const bulkNodes = new Float64Array(6 * bulkNodeCount);
  const watched: number[] = [];
  let worstDefectKm = 0;
  let nextNode = 0;
  for (const { members, segments, bulk } of groups) {
    const lengthS = SLAB_S / segments;
    const sampled = segments > MOST_SEGMENTS_SAMPLED ? segments : 1;
    const firstSampled = sampled === 1 ? slabIndex % segments : 0;
    const timesMs: number[] = [];
    for (let k = 0; k <= segments; k++) timesMs.push(slabStartMs + k * lengthS * 1000);
    for (let k = 0; k < sampled; k++) {
      timesMs.push(slabStartMs + (firstSampled + k + 0.5) * lengthS * 1000);
    }
    const states = bulk.statesAt(timesMs);
    for (let m = 0; m < members.length; m++) {
      const object = members[m];
      const base = m * timesMs.length;
      firstNode[object] = nextNode;
      segmentCount[object] = segments;
      segmentS[object] = lengthS;
      let needsWatching = false;
      for (let k = 0; k < timesMs.length; k++) if (states.error[base + k] !== 0) needsWatching = true;
      for (let k = 0; k <= segments; k++) {
        const from = 3 * (base + k);
        const to = 6 * (nextNode + k);
        for (let axis = 0; axis < 3; axis++) {
          bulkNodes[to + axis] = states.position[from + axis];
          bulkNodes[to + 3 + axis] = states.velocity[from + axis];
        }
        // Written so that a NaN is watched, too.
        if (!(osculatingPerigeeKm(bulkNodes, to) > WATCHED_PERIGEE_KM)) needsWatching = true;
      }
      if (!needsWatching) {
        const defectKm = worstMidpointKm(
          bulkNodes,
          nextNode,
          lengthS,
          firstSampled,
          sampled,
          states.position,
          base + segments + 1,
        );
        if (defectKm > trackToleranceKm(objects[object].eccentricity) / 2) needsWatching = true;
        else if (defectKm > worstDefectKm) worstDefectKm = defectKm;
      }
      if (needsWatching) watched.push(object);
      nextNode += segments + 1;
    }
  }
  let nodes = bulkNodes;
  if (watched.length > 0) {
    const watchedNodes = SLAB_S / WATCHED_STEP_S + 1;
    nodes = new Float64Array(bulkNodes.length + 6 * watchedNodes * watched.length);
    nodes.set(bulkNodes);
    for (const object of watched) {
      firstNode[object] = nextNode;
      segmentS[object] = WATCHED_STEP_S;
      stepTrack(objects[object], object, slabStartMs, nodes, nextNode, segmentCount, originS, endS);
      nextNode += segmentCount[object] + 1;
    }
  }
  return {
    startMs: slabStartMs,
    nodes,
    firstNode,
    segmentCount,
    segmentS,
    originS,
    endS,
    worstDefectKm,
    watchedCount: watched.length,
  };
}

/** Steps one object with SGP4 until it fails or the slab ends. */
function stepTrack(
  { record, epochMs }: TrackedObject,
  object: number,
  slabStartMs: number,
  nodes: Float64Array,
  firstNode: number,
  segmentCount: Int32Array,
  originS: Float64Array,
  endS: Float64Array,
): void {
  const stepMs = WATCHED_STEP_S * 1000;
  const steps = SLAB_S / WATCHED_STEP_S;
  let alive = 0;
  while (
    alive <= steps &&
    sgp4StateAt(record, epochMs, slabStartMs + alive * stepMs, nodes, 6 * (firstNode + alive))
  ) {
    alive++;
  }
  segmentCount[object] = steps;
  if (alive > steps) return;
  segmentCount[object] = Math.max(0, alive - 1);
  if (alive === 0) {
    endS[object] = 0;
    return;
  }
  const scratch = new Float64Array(6);
  let goodMs = slabStartMs + (alive - 1) * stepMs;
  let badMs = goodMs + stepMs;
  while (badMs - goodMs > 1) {
    const middleMs = Math.floor((goodMs + badMs) / 2);
    if (sgp4StateAt(record, epochMs, middleMs, scratch)) goodMs = middleMs;
    else badMs = middleMs;
  }
  endS[object] = (goodMs - slabStartMs) / 1000;
  // The last nodes are laid again so that the last segment has full length and ends where SGP4 does.
  const lastS = endS[object];
  const segments = Math.max(1, Math.ceil(lastS / WATCHED_STEP_S));
  for (let k = 0; k <= segments; k++) {
    const timeMs = slabStartMs + lastS * 1000 - (segments - k) * stepMs;
    if (!sgp4StateAt(record, epochMs, timeMs, nodes, 6 * (firstNode + k))) {
      // No state before the slab either: nothing to draw a path from.
      segmentCount[object] = 0;
      endS[object] = 0;
      return;
    }
  }
  segmentCount[object] = segments;
  originS[object] = lastS - segments * WATCHED_STEP_S;
}

const segment = new Float64Array(SEGMENT_SIZE);
const sample = new Float64Array(6);

function worstMidpointKm(
  nodes: Float64Array,
  firstNode: number,
  lengthS: number,
  firstSegment: number,
  segments: number,
  positions: Float64Array,
  firstPosition: number,
): number {
  let worst2 = 0;
  for (let k = 0; k < segments; k++) {
    const node = 6 * (firstNode + firstSegment + k);
    fitSegment(nodes, node, node + 6, lengthS, segment, 0);
    evaluateSegment(segment, 0, 0.5, 1 / lengthS, sample, 0);
    const at = 3 * (firstPosition + k);
    const dx = sample[0] - positions[at];
    const dy = sample[1] - positions[at + 1];
    const dz = sample[2] - positions[at + 2];
    worst2 = Math.max(worst2, dx * dx + dy * dy + dz * dz);
  }
  return Math.sqrt(worst2);
}

/** Perigee distance of the two-body orbit through one state. */
function osculatingPerigeeKm(states: Float64Array, at: number): number {
  const x = states[at];
  const y = states[at + 1];
  const z = states[at + 2];
  const vx = states[at + 3];
  const vy = states[at + 4];
  const vz = states[at + 5];
  const r = Math.sqrt(x * x + y * y + z * z);
  const v2 = vx * vx + vy * vy + vz * vz;
  const rDotV = x * vx + y * vy + z * vz;
  const momentum2 = r * r * v2 - rDotV * rDotV;
  const semiLatusRectumKm = momentum2 / EARTH_MU_KM3_PER_S2;
  const eccentricity2 = 1 + semiLatusRectumKm * (v2 / EARTH_MU_KM3_PER_S2 - 2 / r);
  return semiLatusRectumKm / (1 + Math.sqrt(Math.max(0, eccentricity2)));
}
