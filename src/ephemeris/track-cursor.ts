import { evaluateSegment, fitSegment, SEGMENT_SIZE } from './septic.js';
import type { SlabTracks } from './slab-tracks.js';

/**
 * A place in time on all tracks of a slab: each object's current segment, fitted when the cursor first
 * comes to it. Times are seconds after the slab's start.
 */
export type TrackCursor = {
  readonly tracks: SlabTracks;
  readonly coefficients: Float64Array;
  readonly segmentStartS: Float64Array;
  readonly segmentEndS: Float64Array;
};

/** Room for a cursor, which the next one may use again: `SEGMENT_SIZE` coefficients an object, and one time each. */
export type CursorRoom = Omit<TrackCursor, 'tracks'>;

export function createTrackCursor(tracks: SlabTracks, room: CursorRoom): TrackCursor {
  room.segmentStartS.fill(Number.POSITIVE_INFINITY);
  room.segmentEndS.fill(Number.NEGATIVE_INFINITY);
  return { tracks, ...room };
}

/** Brings one object's segment to the time; before its first and past its last segment it stays on that. */
export function moveCursor(cursor: TrackCursor, object: number, timeS: number): void {
  const { tracks } = cursor;
  const lengthS = tracks.segmentS[object];
  const last = tracks.segmentCount[object] - 1;
  const index = Math.max(0, Math.min(last, Math.floor((timeS - tracks.originS[object]) / lengthS)));
  const startS = tracks.originS[object] + index * lengthS;
  cursor.segmentStartS[object] = startS;
  cursor.segmentEndS[object] = startS + lengthS;
  const node = 6 * (tracks.firstNode[object] + index);
  fitSegment(tracks.nodes, node, node + 6, lengthS, cursor.coefficients, SEGMENT_SIZE * object);
}

/**
 * State of one object on its track.
 *
 * @param out x, y, z (km) and vx, vy, vz (km/s), TEME, from `outOffset` on
 */
export function stateOnTrack(
  cursor: TrackCursor,
  object: number,
  timeS: number,
  out: Float64Array,
  outOffset: number,
): void {
  if (timeS >= cursor.segmentEndS[object] || timeS < cursor.segmentStartS[object]) {
    moveCursor(cursor, object, timeS);
  }
  const perLength = 1 / cursor.tracks.segmentS[object];
  const u = (timeS - cursor.segmentStartS[object]) * perLength;
  evaluateSegment(cursor.coefficients, SEGMENT_SIZE * object, u, perLength, out, outOffset);
}
