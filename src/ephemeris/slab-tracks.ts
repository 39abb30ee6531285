import type { BulkNodes } from './bulk-nodes.js';

/** No track's tolerance is wider: the cells of a search are laid out for the widest. */
export const WIDEST_TOLERANCE_KM = 1.6;

/** The objects' paths through one slab, as chains of segments between SGP4 nodes. */
export type SlabTracks = {
  readonly startMs: number;
  /** Six doubles a node: km and km/s, TEME. */
  readonly nodes: Float64Array;
  /** First node of each object; its segments join consecutive nodes, none where no track was laid. */
  readonly firstNode: Int32Array;
  readonly segmentCount: Int32Array;
  readonly segmentS: Float64Array;
  /** Where the first segment starts, seconds after the slab's start. */
  readonly originS: Float64Array;
  /** When each object counts, seconds after the slab's start: all of the slab where no reach says otherwise. */
  readonly fromS: Float64Array;
  readonly toS: Float64Array;
  /** Seconds after the slab's start up to which SGP4 gives states; `SLAB_S` for an object that lives on. */
  readonly endS: Float64Array;
  /** Twice the largest distance between each track and SGP4, km. */
  readonly toleranceKm: Float64Array;
  /** Largest distance measured between a segment and SGP4, of the objects that were not stepped. */
  readonly worstDefectKm: number;
};

/** Tracks that are being laid. */
export type MutableTracks = { -readonly [K in keyof SlabTracks]: SlabTracks[K] } & {
  nodes: Float64Array<ArrayBuffer>;
};

/**
 * Copies one of the bulk states to a node.
 *
 * @returns false when there is no state
 */
export function copyState(
  { position, velocity, error }: ReturnType<BulkNodes['statesAt']>,
  index: number,
  nodes: Float64Array,
  node: number,
): boolean {
  if (error[index] !== 0) return false;
  const from = 3 * index;
  const to = 6 * node;
  nodes[to] = position[from];
  nodes[to + 1] = position[from + 1];
  nodes[to + 2] = position[from + 2];
  nodes[to + 3] = velocity[from];
  nodes[to + 4] = velocity[from + 1];
  nodes[to + 5] = velocity[from + 2];
  return Number.isFinite(position[from] + velocity[from]);
}
