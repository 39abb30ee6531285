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

/** Doubles of a chord as it is held against points: start, way, and 1 over the square of its length. */
const CHORD = 7;

/**
 * Collects the chords that come within a reach of a point.
 *
 * @param chords how many of the polygon count, from its start
 * @param near takes each such chord, for `sweptBy`
 */
export function addNearChords(
  polygon: Polygon,
  chords: number,
  center: Vector3,
  reachM: number,
  near: number[],
): void {
  for (let i = 0; i < 3 * chords; i += 3) {
    const at = near.length;
    const dx = polygon[i + 3] - polygon[i];
    const dy = polygon[i + 4] - polygon[i + 1];
    const dz = polygon[i + 5] - polygon[i + 2];
    const square = dx * dx + dy * dy + dz * dz;
    near.push(polygon[i], polygon[i + 1], polygon[i + 2], dx, dy, dz, square === 0 ? 0 : 1 / square);
    if (squareFrom(center[0], center[1], center[2], near, at) >= reachM * reachM) near.length = at;
  }
}

/**
 * Tells whether a ball has swept a point on its way along chords.
 *
 * @param chords as `addNearChords` collects them
 */
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
    for (let i = 0; i < chords.length; i += CHORD) {
      if (squareFrom(x, y, z, chords, i) < limit) {
        latest = i;
        return true;
      }
    }
    return false;
  };
}

/** Square of the distance of a point from the chord that stands at `at`. */
function squareFrom(x: number, y: number, z: number, chords: readonly number[], at: number): number {
  const px = x - chords[at];
  const py = y - chords[at + 1];
  const pz = z - chords[at + 2];
  const dx = chords[at + 3];
  const dy = chords[at + 4];
  const dz = chords[at + 5];
  const part = Math.min(1, Math.max(0, (px * dx + py * dy + pz * dz) * chords[at + 6]));
  const ox = px - part * dx;
  const oy = py - part * dy;
  const oz = pz - part * dz;
  return ox * ox + oy * oy + oz * oz;
}
