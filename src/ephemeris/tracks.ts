import { type BulkNodes, createBulkNodes } from './bulk-nodes.js';
import { EARTH_RADIUS_KM } from './gravity.js';
import { SLAB_S, segmentsPerSlab } from './node-spacing.js';
import { osculatingPerigeeKm } from './osculating-perigee.js';
import { defectAtKm, MEASURED_PART } from './segment-defect.js';
import type { Sgp4Records } from './sgp4-records.js';
import { copyState, type MutableTracks, type SlabTracks, WIDEST_TOLERANCE_KM } from './slab-tracks.js';
import { layWatchedTracks, NODES_PER_WATCHED } from './watched-tracks.js';

/**
 * How far an interpolated position may lie from SGP4's, doubled. In near-circular orbits it is interpolation
 * that errs, by some 0.1 km; in eccentric ones SGP4's velocity is not exactly the derivative of its position,
 * by up to some m/s. The segments that are measured in every slab must be within half of this; an object that
 * is not gets shorter ones.
 *
 * @param eccentricity mean eccentricity
 */
function trackToleranceKm(eccentricity: number): number {
  return eccentricity < 0.01 ? 0.5 : WIDEST_TOLERANCE_KM;
}

/** Segments of an object that breaks its tolerance are cut into so many. */
const FINER = 4;
/** Below this height SGP4 may give up between two nodes. */
const WATCHED_PERIGEE_KM = EARTH_RADIUS_KM + 90;
/**
 * Groups with more segments hold eccentric orbits, which are worst near perigee: of them every second segment
 * is measured, in the next slab the others.
 */
const MOST_SEGMENTS_SAMPLED = 12;

export type TrackedObject = {
  /** Of its record among the records. */
  readonly place: number;
  readonly eccentricity: number;
  readonly perigeeRadiusKm: number;
  /** Object counts as gone from then on. Default: never. */
  readonly goneFromMs?: number;
};

/** Seconds after a slab's start. */
export type Span = { readonly fromS: number; readonly toS: number };

/**
 * When an object can be within reach of anything that matters in a slab: a track is laid for that time, and for
 * `marginS` before and after; none where it never can.
 */
export type Reach = {
  readonly spanOf: (object: number, slabStartMs: number) => Span | undefined;
  readonly marginS: number;
};

export type TrackMaker = {
  /** The tracks of a slab, which the next call overwrites; objects keep the order in which they were given. */
  readonly tracksOf: (slabStartMs: number, slabIndex: number) => SlabTracks;
  /** Gives back the memory of the records. */
  readonly dispose: () => void;
};

/** Objects with as many segments in a slab, of which the same are laid: `last` not included. */
type Group = {
  readonly members: Int32Array;
  readonly segments: number;
  readonly first: number;
  readonly last: number;
  readonly bulk: BulkNodes;
};

/** A group whose records the bulk propagator keeps; those that may be out of reach are handed over slab by slab. */
type LastingGroup = Pick<Group, 'members' | 'segments'> & { readonly bulk: BulkNodes | undefined };

/** Groups with more segments hold eccentric orbits: those that can be out of reach for hours. */
const LEAST_SEGMENTS_OUT = 15;

/**
 * Groups the objects by node spacing and hands their records to the bulk propagator once.
 * `loadSgp4` must have been awaited in this thread.
 *
 * @param reach default: every object may always be within reach
 */
export function createTrackMaker(
  records: Sgp4Records,
  objects: readonly TrackedObject[],
  reach?: Reach,
): TrackMaker {
  const bySegments = new Map<number, number[]>();
  objects.forEach((object, index) => {
    const segments = segmentsPerSlab(object.eccentricity, object.perigeeRadiusKm);
    const members = bySegments.get(segments);
    if (members === undefined) bySegments.set(segments, [index]);
    else members.push(index);
  });
  const groups: LastingGroup[] = [...bySegments]
    .sort(([a], [b]) => a - b)
    .map(([segments, members]) => ({
      segments,
      members: Int32Array.from(members),
      bulk:
        reach !== undefined && segments >= LEAST_SEGMENTS_OUT
          ? undefined
          : bulkOf(records, objects, members, segments),
    }));
  let room = new Float64Array(0);
  const tracksOf = (slabStartMs: number, slabIndex: number): SlabTracks => {
    const spans = new Map<number, Span>();
    const passing: Group[] = [];
    const lasting: Group[] = [];
    for (const { segments, members, bulk } of groups) {
      if (bulk !== undefined) lasting.push({ segments, members, first: 0, last: segments, bulk });
      else if (reach !== undefined) {
        for (const object of members) {
          const span = reach.spanOf(object, slabStartMs);
          if (span !== undefined) spans.set(object, span);
        }
        passing.push(...passingGroups(records, objects, members, segments, spans, reach.marginS));
      }
    }
    const tracks = makeTracks(
      records,
      objects,
      [...lasting, ...passing],
      spans,
      reach?.marginS ?? 0,
      slabStartMs,
      slabIndex,
      room,
    );
    for (const { bulk } of passing) bulk.dispose();
    room = tracks.nodes;
    return tracks;
  };
  return {
    tracksOf,
    dispose: () => {
      for (const { bulk } of groups) bulk?.dispose();
    },
  };
}

/** The members with a span, by which of their segments hold it. */
function passingGroups(
  records: Sgp4Records,
  objects: readonly TrackedObject[],
  members: Int32Array,
  segments: number,
  spans: ReadonlyMap<number, Span>,
  marginS: number,
): Group[] {
  const lengthS = SLAB_S / segments;
  const bySegments = new Map<number, { first: number; last: number; members: number[] }>();
  for (const object of members) {
    const span = spans.get(object);
    if (span === undefined) continue;
    const first = Math.max(0, Math.floor((span.fromS - marginS) / lengthS));
    const last = Math.min(segments, Math.ceil((span.toS + marginS) / lengthS));
    const key = first * (segments + 1) + last;
    const known = bySegments.get(key);
    if (known === undefined) bySegments.set(key, { first, last, members: [object] });
    else known.members.push(object);
  }
  return [...bySegments.values()].map(({ first, last, members: own }) => ({
    members: Int32Array.from(own),
    segments,
    first,
    last,
    bulk: bulkOf(records, objects, own, last - first),
  }));
}

function bulkOf(
  records: Sgp4Records,
  objects: readonly TrackedObject[],
  members: Int32Array | readonly number[],
  segments: number,
): BulkNodes {
  return createBulkNodes(
    records,
    Array.from(members, (index) => objects[index].place),
    2 * segments + 1,
  );
}

function makeTracks(
  records: Sgp4Records,
  objects: readonly TrackedObject[],
  groups: readonly Group[],
  spans: ReadonlyMap<number, Span>,
  marginS: number,
  slabStartMs: number,
  slabIndex: number,
  room: Float64Array<ArrayBuffer>,
): SlabTracks & { nodes: Float64Array<ArrayBuffer> } {
  const count = objects.length;
  const nodeCount = groups.reduce((sum, group) => sum + nodesOf(group), 0);
  const tracks: MutableTracks = {
    startMs: slabStartMs,
    nodes: withRoom(room, nodeCount, 0),
    firstNode: new Int32Array(count),
    segmentCount: new Int32Array(count),
    segmentS: new Float64Array(count).fill(SLAB_S),
    originS: new Float64Array(count),
    fromS: new Float64Array(count),
    toS: new Float64Array(count).fill(SLAB_S),
    endS: new Float64Array(count).fill(SLAB_S),
    toleranceKm: Float64Array.from(objects, ({ eccentricity }) => trackToleranceKm(eccentricity)),
    worstDefectKm: 0,
  };
  for (const [object, { fromS, toS }] of spans) {
    tracks.fromS[object] = fromS;
    tracks.toS[object] = toS;
  }
  const watched: number[] = [];
  const retried = new Map<number, number[]>();
  let nextNode = 0;
  for (const group of groups) {
    const { segments } = group;
    const stride = segments > MOST_SEGMENTS_SAMPLED ? 2 : segments;
    const { dying, wide } = layTracks(
      tracks,
      objects,
      group,
      slabStartMs,
      nextNode,
      slabIndex % stride,
      stride,
    );
    nextNode += nodesOf(group);
    watched.push(...dying);
    if (wide.length > 0) retried.set(segments * FINER, [...(retried.get(segments * FINER) ?? []), ...wide]);
  }
  let node = nextNode;
  const finerGroups = [...retried].map(([segments, members]) => ({
    segments,
    first: 0,
    last: segments,
    members: Int32Array.from(members),
    bulk: bulkOf(records, objects, members, segments),
  }));
  const finerCount = finerGroups.reduce((sum, group) => sum + nodesOf(group), 0);
  tracks.nodes = withRoom(tracks.nodes, nodeCount + finerCount, nodeCount);
  for (const group of finerGroups) {
    const { dying, wide } = layTracks(tracks, objects, group, slabStartMs, node, 0, 1);
    node += nodesOf(group);
    watched.push(...dying, ...wide);
    group.bulk.dispose();
  }
  tracks.nodes = withRoom(tracks.nodes, node + NODES_PER_WATCHED * watched.length, node);
  const placed = watched.map((object) => ({ object, place: objects[object].place }));
  layWatchedTracks(records, placed, tracks, node, marginS);
  return tracks;
}

function nodesOf({ members, first, last }: Group): number {
  return members.length * (last - first + 1);
}

type Laid = {
  /** Objects that SGP4 gives up on in the slab, or may. */
  readonly dying: readonly number[];
  /** Objects whose tracks are further from SGP4 than they may be. */
  readonly wide: number[];
};

/** Lays the tracks of one group from the bulk propagator's states and measures them between nodes. */
function layTracks(
  tracks: MutableTracks,
  objects: readonly TrackedObject[],
  { members, segments, first, last, bulk }: Group,
  slabStartMs: number,
  groupNode: number,
  firstMeasured: number,
  stride: number,
): Laid {
  const { nodes } = tracks;
  const dying: number[] = [];
  const wide: number[] = [];
  const lengthS = SLAB_S / segments;
  const count = last - first;
  const timesMs: number[] = [];
  for (let k = first; k <= last; k++) timesMs.push(slabStartMs + k * lengthS * 1000);
  // Which ones does not hang on where the track starts.
  const measured: number[] = [];
  for (let k = firstMeasured; k < last; k += stride) if (k >= first) measured.push(k);
  for (const k of measured) timesMs.push(Math.round(slabStartMs + (k + MEASURED_PART) * lengthS * 1000));
  const states = bulk.statesAt(timesMs);
  const { position, error } = states;
  const times = timesMs.length;
  for (let m = 0; m < members.length; m++) {
    const object = members[m];
    const base = m * times;
    const firstNode = groupNode + m * (count + 1);
    tracks.firstNode[object] = firstNode;
    tracks.segmentCount[object] = count;
    tracks.segmentS[object] = lengthS;
    tracks.originS[object] = first * lengthS;
    const isGone = (objects[object].goneFromMs ?? Number.POSITIVE_INFINITY) <= slabStartMs;
    if (isGone || (first === 0 && (error[base] !== 0 || Number.isNaN(position[3 * base])))) {
      // Dead before the slab begins: no path, and no more work.
      tracks.segmentCount[object] = 0;
      tracks.endS[object] = 0;
      continue;
    }
    let diesOrMay = false;
    for (let k = 0; k < times; k++) if (error[base + k] !== 0) diesOrMay = true;
    for (let k = 0; k <= count; k++) {
      if (!copyState(states, base + k, nodes, firstNode + k)) diesOrMay = true;
      // Written so that a NaN is watched, too.
      if (!(osculatingPerigeeKm(nodes, 6 * (firstNode + k)) > WATCHED_PERIGEE_KM)) diesOrMay = true;
    }
    if (diesOrMay) {
      dying.push(object);
      continue;
    }
    let defectKm = 0;
    for (const [n, k] of measured.entries()) {
      const at = base + count + 1 + n;
      defectKm = Math.max(defectKm, defectAtKm(nodes, firstNode + k - first, lengthS, position, at));
    }
    if (defectKm > tracks.toleranceKm[object] / 2) wide.push(object);
    else if (defectKm > tracks.worstDefectKm) tracks.worstDefectKm = defectKm;
  }
  return { dying, wide };
}

/** Room for `nodes` nodes that keeps the first `used` ones, with some to spare so that the next slab has enough. */
function withRoom(room: Float64Array<ArrayBuffer>, nodes: number, used: number): Float64Array<ArrayBuffer> {
  if (room.length >= 6 * nodes) return room;
  const larger = new Float64Array(6 * Math.ceil(1.1 * nodes));
  larger.set(room.subarray(0, 6 * used));
  return larger;
}
