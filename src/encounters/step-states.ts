import { SEGMENT_SIZE } from '../ephemeris/septic.js';
import { moveCursor, type TrackCursor } from '../ephemeris/track-cursor.js';
import { ORDINARY_RATE_PER_S, type StepBounds } from './bounds.js';
import { cellOf, type DirectionCells } from './direction-cells.js';
import { shellOf } from './shell.js';

/** One record fills one cache line of the usual 64 bytes. */
export const RECORD_SIZE = 8;

/** Where all objects are in the middle of a step, and what the search needs to know of each; by object. */
export type StepStates = {
  /** `RECORD_SIZE` doubles: x, y, z (km), vx, vy, vz (km/s), lowest radius over the step (km), eps (km). */
  readonly records: Float64Array;
  readonly cell: Int32Array;
  /** Radius interval over the step, widened for the reach, as shell numbers. */
  readonly low: Int32Array;
  readonly high: Int32Array;
  /** 1 where the object turns faster than any circular orbit. */
  readonly fast: Uint8Array;
};

export function createStepStates(count: number): StepStates {
  return {
    records: new Float64Array(RECORD_SIZE * count),
    cell: new Int32Array(count),
    low: new Int32Array(count),
    high: new Int32Array(count),
    fast: new Uint8Array(count),
  };
}

/**
 * Evaluates the objects of a list in the middle of a step.
 *
 * @param objects object indices, `count` of them
 * @param timeS middle of the step, seconds after the slab's start
 * @param curvatureKmPerS2 A of each object, see `bounds.ts`
 * @param toleranceKm eps of each object
 */
export function evaluateStep(
  step: StepStates,
  cursor: TrackCursor,
  objects: Int32Array,
  count: number,
  timeS: number,
  bounds: StepBounds,
  cells: DirectionCells,
  curvatureKmPerS2: Float64Array,
  toleranceKm: Float64Array,
): void {
  const { coefficients, segmentStartS, segmentEndS } = cursor;
  const { segmentS } = cursor.tracks;
  const { records } = step;
  const halfStepS = bounds.halfStepS;
  for (let k = 0; k < count; k++) {
    const object = objects[k];
    if (timeS >= segmentEndS[object] || timeS < segmentStartS[object]) moveCursor(cursor, object, timeS);
    const perLength = 1 / segmentS[object];
    const u = (timeS - segmentStartS[object]) * perLength;
    const to = RECORD_SIZE * object;
    let at = SEGMENT_SIZE * object;
    let radius2 = 0;
    let rDotV = 0;
    let speed2 = 0;
    for (let axis = 0; axis < 3; axis++) {
      const c1 = coefficients[at + 1];
      const c2 = coefficients[at + 2];
      const c3 = coefficients[at + 3];
      const c4 = coefficients[at + 4];
      const c5 = coefficients[at + 5];
      const c6 = coefficients[at + 6];
      const c7 = coefficients[at + 7];
      const p = coefficients[at] + u * (c1 + u * (c2 + u * (c3 + u * (c4 + u * (c5 + u * (c6 + u * c7))))));
      const v =
        perLength *
        (c1 + u * (2 * c2 + u * (3 * c3 + u * (4 * c4 + u * (5 * c5 + u * (6 * c6 + u * 7 * c7))))));
      records[to + axis] = p;
      records[to + 3 + axis] = v;
      radius2 += p * p;
      rDotV += p * v;
      speed2 += v * v;
      at += 8;
    }
    const radius = Math.sqrt(radius2);
    const swing =
      (Math.abs(rDotV) / radius) * halfStepS + 0.5 * curvatureKmPerS2[object] * halfStepS * halfStepS;
    const lowKm = radius - swing;
    const margin = bounds.baseReachKm / 2 + toleranceKm[object];
    records[to + 6] = lowKm;
    records[to + 7] = toleranceKm[object];
    step.low[object] = shellOf(lowKm - margin);
    step.high[object] = shellOf(radius + swing + margin);
    const momentum = Math.sqrt(Math.max(0, radius2 * speed2 - rDotV * rDotV));
    // Angular rate at the lowest point of the step; momentum changes by far less than the percent added.
    step.fast[object] = 1.01 * momentum > ORDINARY_RATE_PER_S * lowKm * lowKm ? 1 : 0;
    const perRadius = 1 / radius;
    step.cell[object] = cellOf(
      cells,
      records[to] * perRadius,
      records[to + 1] * perRadius,
      records[to + 2] * perRadius,
    );
  }
}
