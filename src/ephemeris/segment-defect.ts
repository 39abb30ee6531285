import { evaluateSegment, fitSegment, SEGMENT_SIZE } from './septic.js';

/**
 * Where in a segment it is measured against SGP4. Errors of interpolation are largest half-way, but velocities
 * that are off alike at both ends leave no trace there.
 */
export const MEASURED_PART = 3 / 8;

const segment = new Float64Array(SEGMENT_SIZE);
const sample = new Float64Array(6);

/**
 * Distance between the segment after a node, in its measured place, and SGP4's position there, km.
 *
 * @param index of the position among `positions`
 */
export function defectAtKm(
  nodes: Float64Array,
  node: number,
  lengthS: number,
  positions: Float64Array,
  index: number,
): number {
  fitSegment(nodes, 6 * node, 6 * (node + 1), lengthS, segment, 0);
  evaluateSegment(segment, 0, MEASURED_PART, 1 / lengthS, sample, 0);
  const dx = sample[0] - positions[3 * index];
  const dy = sample[1] - positions[3 * index + 1];
  const dz = sample[2] - positions[3 * index + 2];
  return Math.sqrt(dx * dx + dy * dy + dz * dz);
}
