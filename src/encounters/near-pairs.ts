import { EARTH_RADIUS_KM } from '../ephemeris/gravity.js';
import { WIDEST_TOLERANCE_KM } from '../ephemeris/tracks.js';
import { FASTEST_RELATIVE_KM_PER_S, lineReachKm, type StepBounds, tidePerS2 } from './bounds.js';
import { halfNeighborOffsets, neighborOffsets } from './direction-cells.js';
import type { DirectionGrid } from './direction-grid.js';
import { RECORD_SIZE, type StepStates } from './step-states.js';

/** Pairs of one step whose straight lines pass close enough to be looked at on their tracks. */
export type NearPairs = {
  size: number;
  first: Int32Array;
  second: Int32Array;
  /** Pairs looked at so far, for choosing the step. */
  visits: number;
};

export function createNearPairs(): NearPairs {
  return { size: 0, first: new Int32Array(1024), second: new Int32Array(1024), visits: 0 };
}

/** What the pair finders share within one step. */
type Sweep = {
  readonly halfStepS: number;
  readonly baseReachKm: number;
  /** Squared reach of a straight line for the fastest pair at the Earth's surface: what no pair exceeds. */
  readonly widestReach2: number;
  readonly pairs: NearPairs;
};

function sweepOf(bounds: StepBounds, pairs: NearPairs): Sweep {
  const widest = lineReachKm(
    bounds.halfStepS,
    bounds.baseReachKm + 2 * WIDEST_TOLERANCE_KM,
    tidePerS2(EARTH_RADIUS_KM - 1),
    FASTEST_RELATIVE_KM_PER_S,
  );
  return {
    halfStepS: bounds.halfStepS,
    baseReachKm: bounds.baseReachKm,
    widestReach2: widest * widest,
    pairs,
  };
}

/** Bound 4 of `bounds.ts` on one pair: objects a and b, whose records start at i and j. */
function lookAt(
  sweep: Sweep,
  recordsA: Float64Array,
  i: number,
  recordsB: Float64Array,
  j: number,
  a: number,
  b: number,
): void {
  const { halfStepS } = sweep;
  const x = recordsB[j] - recordsA[i];
  const y = recordsB[j + 1] - recordsA[i + 1];
  const z = recordsB[j + 2] - recordsA[i + 2];
  const vx = recordsB[j + 3] - recordsA[i + 3];
  const vy = recordsB[j + 4] - recordsA[i + 4];
  const vz = recordsB[j + 5] - recordsA[i + 5];
  const distance2 = x * x + y * y + z * z;
  const along = x * vx + y * vy + z * vz;
  const speed2 = vx * vx + vy * vy + vz * vz;
  const absAlong = Math.abs(along);
  const inside = absAlong <= speed2 * halfStepS;
  // Squared distance of the line times speed2 where the nearest point lies inside the step.
  const line = inside
    ? distance2 * speed2 - along * along
    : distance2 + halfStepS * (halfStepS * speed2 - 2 * absAlong);
  if (line > (inside ? sweep.widestReach2 * speed2 : sweep.widestReach2)) return;
  const tide = tidePerS2(Math.min(recordsA[i + 6], recordsB[j + 6]));
  const reachKm = sweep.baseReachKm + recordsA[i + 7] + recordsB[j + 7];
  const reach = lineReachKm(halfStepS, reachKm, tide, Math.sqrt(speed2));
  if (line > (inside ? reach * reach * speed2 : reach * reach)) return;
  const { pairs } = sweep;
  if (pairs.size === pairs.first.length) {
    pairs.first = grown(pairs.first);
    pairs.second = grown(pairs.second);
  }
  pairs.first[pairs.size] = a < b ? a : b;
  pairs.second[pairs.size++] = a < b ? b : a;
}

function lookAtObjects(sweep: Sweep, step: StepStates, a: number, b: number): void {
  lookAt(sweep, step.records, RECORD_SIZE * a, step.records, RECORD_SIZE * b, a, b);
}

function grown(array: Int32Array): Int32Array {
  const larger = new Int32Array(2 * array.length);
  larger.set(array);
  return larger;
}

/**
 * Pairs within one set of objects. The grid holds those that turn no faster than a circular orbit; the
 * others come as a list.
 */
export function findPairsWithin(
  step: StepStates,
  bounds: StepBounds,
  grid: DirectionGrid,
  fast: Int32Array,
  fastCount: number,
  pairs: NearPairs,
): void {
  const sweep = sweepOf(bounds, pairs);
  const { cellStart, cell, object, low, high, size, records } = grid;
  const offsets = halfNeighborOffsets(grid.cells.width);
  let visits = 0;
  for (let start = 0; start < size; ) {
    const home = cell[start];
    const end = cellStart[home + 1];
    for (let i = start; i < end; i++) {
      const top = high[i];
      for (let k = i + 1; k < end && low[k] <= top; k++) {
        visits++;
        lookAt(sweep, records, RECORD_SIZE * i, records, RECORD_SIZE * k, object[i], object[k]);
      }
    }
    for (let n = 0; n < offsets.length; n++) {
      const neighbor = home + offsets[n];
      let j = cellStart[neighbor];
      const neighborEnd = cellStart[neighbor + 1];
      if (j === neighborEnd) continue;
      // Both columns rise in `low`: whoever starts lower meets all that start before it ends.
      for (let i = start; i < end && j < neighborEnd; ) {
        if (low[i] <= low[j]) {
          const top = high[i];
          for (let k = j; k < neighborEnd && low[k] <= top; k++) {
            visits++;
            lookAt(sweep, records, RECORD_SIZE * i, records, RECORD_SIZE * k, object[i], object[k]);
          }
          i++;
        } else {
          const top = high[j];
          for (let k = i; k < end && low[k] <= top; k++) {
            visits++;
            lookAt(sweep, records, RECORD_SIZE * k, records, RECORD_SIZE * j, object[k], object[j]);
          }
          j++;
        }
      }
    }
    start = end;
  }
  pairs.visits += visits;
  findFastPairs(step, sweep, grid, fast, fastCount);
  for (let k = 0; k < fastCount; k++) {
    for (let m = k + 1; m < fastCount; m++) {
      if (overlap(step, fast[k], fast[m])) lookAtObjects(sweep, step, fast[k], fast[m]);
    }
  }
}

/**
 * Pairs between the objects of a grid with its list of fast ones, and other objects.
 *
 * @param others object indices, `otherCount` of them, evaluated in `step`
 * @param occupied 1 for each cell with an object of the grid within two cells of it
 */
export function findPairsBetween(
  step: StepStates,
  bounds: StepBounds,
  grid: DirectionGrid,
  fast: Int32Array,
  fastCount: number,
  others: Int32Array,
  otherCount: number,
  occupied: Uint8Array,
  pairs: NearPairs,
): void {
  const sweep = sweepOf(bounds, pairs);
  const { cellStart, object, low, high, records } = grid;
  const near = neighborOffsets(grid.cells.width, 1);
  const wide = neighborOffsets(grid.cells.width, 2);
  let visits = 0;
  for (let k = 0; k < otherCount; k++) {
    const other = others[k];
    const home = step.cell[other];
    if (occupied[home] !== 0) {
      const bottom = step.low[other];
      const top = step.high[other];
      const offsets = step.fast[other] === 0 ? near : wide;
      for (let n = 0; n < offsets.length; n++) {
        const neighbor = home + offsets[n];
        const end = cellStart[neighbor + 1];
        for (let slot = cellStart[neighbor]; slot < end && low[slot] <= top; slot++) {
          if (high[slot] < bottom) continue;
          visits++;
          lookAt(sweep, records, RECORD_SIZE * slot, step.records, RECORD_SIZE * other, object[slot], other);
        }
      }
    }
    for (let m = 0; m < fastCount; m++) {
      if (overlap(step, fast[m], other)) lookAtObjects(sweep, step, fast[m], other);
    }
  }
  pairs.visits += visits;
}

/** Marks the cells that have an object of the grid within two cells. */
export function markOccupied(grid: DirectionGrid, occupied: Uint8Array): void {
  occupied.fill(0);
  const offsets = neighborOffsets(grid.cells.width, 2);
  for (let slot = 0; slot < grid.size; slot = grid.cellStart[grid.cell[slot] + 1]) {
    const home = grid.cell[slot];
    for (let n = 0; n < offsets.length; n++) occupied[home + offsets[n]] = 1;
  }
}

/** Each fast object against the grid, two cells around it. */
function findFastPairs(
  step: StepStates,
  sweep: Sweep,
  grid: DirectionGrid,
  fast: Int32Array,
  fastCount: number,
): void {
  const { cellStart, object, low, high, records } = grid;
  const offsets = neighborOffsets(grid.cells.width, 2);
  for (let k = 0; k < fastCount; k++) {
    const a = fast[k];
    for (let n = 0; n < offsets.length; n++) {
      const neighbor = step.cell[a] + offsets[n];
      const end = cellStart[neighbor + 1];
      for (let slot = cellStart[neighbor]; slot < end && low[slot] <= step.high[a]; slot++) {
        if (high[slot] >= step.low[a])
          lookAt(sweep, step.records, RECORD_SIZE * a, records, RECORD_SIZE * slot, a, object[slot]);
      }
    }
  }
}

function overlap(step: StepStates, a: number, b: number): boolean {
  return step.low[a] <= step.high[b] && step.low[b] <= step.high[a];
}
