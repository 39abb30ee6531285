import type { Vector3 } from '../vector.js';
import { type Piece, positionAt } from './path-pieces.js';

/** Just inside the radius, so that the rim of the ball is not taken as swept by the chord before. */
const RIM = 1 - 1e-9;

/** Corners of a polygon that stands for a piece of the path: x, y, z one after the other, meters. */
export type Polygon = Float64Array;

/** @param longestM of a chord */
export function polygonOf({ span, from, to, lengthM }: Piece, longestM: number): Polygon {
  const count = Math.max(1, Math.ceil(lengthM / longestM));
  const corners = new Float64Array(3 * (count + 1));
  for (let i = 0; i <= count; i++) {
    corners.set(positionAt(span, from + ((to - from) * i) / count), 3 * i);
  }
  return corners;
}

/**
 * Collects the chords that come within a reach of a point.
 *
 * @param chords how many of the polygon count, from its start
 * @param near takes both ends of each such chord
 */
export function addNearChords(
  polygon: Polygon,
  chords: number,
  center: Vector3,
  reachM: number,
  near: number[],
): void {
  for (let i = 0; i < 3 * chords; i += 3) {
    if (squareFrom(center[0], center[1], center[2], polygon, i) < reachM * reachM) {
      for (let k = 0; k < 6; k++) near.push(polygon[i + k]);
    }
  }
}

/** Tells whether a ball has swept a point on its way along chords, each given by both ends. */
export function sweptBy(
  chords: readonly number[],
  radiusM: number,
): (x: number, y: number, z: number) => boolean {
  const limit = RIM * radiusM * radiusM;
  // Neighboring points are mostly swept by the same chord.
  let latest = 0;
  return (x, y, z) => {
    if (chords.length === 0) return false;
    if (squareFrom(x, y, z, chords, latest) < limit) return true;
    for (let i = 0; i < chords.length; i += 6) {
      if (squareFrom(x, y, z, chords, i) < limit) {
        latest = i;
        return true;
      }
    }
    return false;
  };
}

/** Square of the distance of a point from the chord whose ends stand at `at` and after it. */
function squareFrom(x: number, y: number, z: number, ends: ArrayLike<number>, at: number): number {
  const px = x - ends[at];
  const py = y - ends[at + 1];
  const pz = z - ends[at + 2];
  const dx = ends[at + 3] - ends[at];
  const dy = ends[at + 4] - ends[at + 1];
  const dz = ends[at + 5] - ends[at + 2];
  const square = dx * dx + dy * dy + dz * dz;
  const part = square === 0 ? 0 : Math.min(1, Math.max(0, (px * dx + py * dy + pz * dz) / square));
  const ox = px - part * dx;
  const oy = py - part * dy;
  const oz = pz - part * dz;
  return ox * ox + oy * oy + oz * oz;
}
