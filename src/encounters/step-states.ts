import { SEGMENT_SIZE } from '../ephemeris/septic.js';
import { moveCursor, type TrackCursor } from '../ephemeris/track-cursor.js';
import { ORDINARY_RATE_PER_S } from './bounds.js';
import { cellOf, type DirectionCells } from './direction-cells.js';
import { shellOf } from './shell.js';

/** Numbers of one record: x, y, z (km), vx, vy, vz (km/s) and two blanks, half a line of the usual cache. */
export const RECORD_SIZE = 8;

/** What becomes of an object in a step: most stay at nearly the same height and turn as circular orbits do. */
export const FLAT = 0;
/** Crosses many shells. */
export const STEEP = 1;
/** Turns faster than `ORDINARY_RATE_PER_S`. */
export const FAST = 2;
/** Is not there. */
export const ABSENT = 3;

/** Objects whose radius can change by more in half a step are steep, km. */
const FLAT_SWING_KM = 9;

/** Where all objects are in the middle of a step, and what the search needs to know of each; by object. */
export type StepStates = {
  /** In single precision: what that rounds away is in eps of `bounds.ts`. */
  readonly records: Float32Array;
  readonly cell: Int32Array;
  /** Radius interval over the step, widened for the reach, as shell numbers. */
  readonly low: Int32Array;
  readonly high: Int32Array;
  readonly kind: Uint8Array;
};

/** Steps that are evaluated together, so that each object's segment is read from memory once for all. */
export type StepBatch = { readonly all: StepStates; readonly steps: readonly StepStates[] };

export function createStepBatch(objectCount: number, stepCount: number): StepBatch {
  const size = objectCount * stepCount;
  const all = {
    records: new Float32Array(RECORD_SIZE * size),
    cell: new Int32Array(size),
    low: new Int32Array(size),
    high: new Int32Array(size),
    kind: new Uint8Array(size),
  };
  const steps = Array.from({ length: stepCount }, (_, k) => {
    const from = k * objectCount;
    const to = from + objectCount;
    return {
      records: all.records.subarray(RECORD_SIZE * from, RECORD_SIZE * to),
      cell: all.cell.subarray(from, to),
      low: all.low.subarray(from, to),
      high: all.high.subarray(from, to),
      kind: all.kind.subarray(from, to),
    };
  });
  return { all, steps };
}

/** What evaluating objects takes besides their tracks. */
export type StepObjects = {
  readonly cells: DirectionCells;
  readonly halfStepS: number;
  /** When each object is there, seconds after the slab's start. */
  readonly fromS: Float64Array;
  readonly toS: Float64Array;
  /** A of `bounds.ts`, km/s^2. */
  readonly curvature: Float64Array;
  /** By how much the radius interval of each object is widened on either side, km. */
  readonly marginKm: Float64Array;
};

/**
 * Evaluates objects in the middle of each step of a batch.
 *
 * @param candidates object indices
 * @param firstMiddleS middle of the first step, seconds after the slab's start
 * @param stepCount number of steps, from the first of the batch on
 */
export function evaluateSteps(
  batch: StepBatch,
  cursor: TrackCursor,
  candidates: Int32Array,
  firstMiddleS: number,
  stepCount: number,
  { cells, halfStepS, fromS, toS, curvature, marginKm }: StepObjects,
): void {
  const { coefficients, segmentStartS, segmentEndS } = cursor;
  const { segmentS } = cursor.tracks;
  const { records, cell, low, high, kind } = batch.all;
  const objectCount = fromS.length;
  const halfSquareS2 = 0.5 * halfStepS * halfStepS;
  for (let k = 0; k < candidates.length; k++) {
    const object = candidates[k];
    const margin = marginKm[object];
    const arc = curvature[object] * halfSquareS2;
    const perLength = 1 / segmentS[object];
    for (let b = 0; b < stepCount; b++) {
      const timeS = firstMiddleS + 2 * b * halfStepS;
      const out = b * objectCount + object;
      if (!(toS[object] > timeS - halfStepS && fromS[object] < timeS + halfStepS)) {
        kind[out] = ABSENT;
        continue;
      }
      if (timeS >= segmentEndS[object] || timeS < segmentStartS[object]) moveCursor(cursor, object, timeS);
      const u = (timeS - segmentStartS[object]) * perLength;
      const to = RECORD_SIZE * out;
      let at = SEGMENT_SIZE * object;
      let radius2 = 0;
      let rDotV = 0;
      let speed2 = 0;
      for (let axis = 0; axis < 3; axis++) {
        // Horner's rule for the polynomial, and for its derivative beside it.
        let p = coefficients[at + 7];
        let v = p;
        p = p * u + coefficients[at + 6];
        v = v * u + p;
        p = p * u + coefficients[at + 5];
        v = v * u + p;
        p = p * u + coefficients[at + 4];
        v = v * u + p;
        p = p * u + coefficients[at + 3];
        v = v * u + p;
        p = p * u + coefficients[at + 2];
        v = v * u + p;
        p = p * u + coefficients[at + 1];
        v = (v * u + p) * perLength;
        p = p * u + coefficients[at];
        records[to + axis] = p;
        records[to + 3 + axis] = v;
        radius2 += p * p;
        rDotV += p * v;
        speed2 += v * v;
        at += 8;
      }
      const radius = Math.sqrt(radius2);
      const perRadius = 1 / radius;
      const swing = Math.abs(rDotV) * perRadius * halfStepS + arc;
      const lowShell = shellOf(radius - swing - margin);
      const highShell = shellOf(radius + swing + margin);
      low[out] = lowShell;
      high[out] = highShell;
      cell[out] = cellOf(cells, records[to], records[to + 1], records[to + 2] * perRadius);
      // Angular rate at the lowest point of the step; J2 changes the momentum by far less than what is added.
      const rate = ORDINARY_RATE_PER_S * (radius - swing) * (radius - swing);
      kind[out] =
        1.004 * (radius2 * speed2 - rDotV * rDotV) > rate * rate
          ? FAST
          : swing > FLAT_SWING_KM
            ? STEEP
            : FLAT;
    }
  }
}
