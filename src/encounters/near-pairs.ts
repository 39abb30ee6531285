import { EARTH_RADIUS_KM } from '../ephemeris/gravity.js';
import { FASTEST_RELATIVE_KM_PER_S, lineReachKm, type StepBounds, tidePerS2 } from './bounds.js';
import { type CellLists, cellsWithin, type DirectionCells } from './direction-cells.js';
import type { DirectionGrid } from './direction-grid.js';
import { shellFloorKm } from './shell.js';
import { FAST, RECORD_SIZE, type StepStates } from './step-states.js';

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

/** For each cell, the cells in which its objects can have a partner. */
export type CellPartners = {
  /** Between two ordinary objects, each pair of cells once and without the cell itself. */
  readonly later: CellLists;
  readonly ordinary: CellLists;
  /** Between an ordinary object and a fast one. */
  readonly fast: CellLists;
};

export function cellPartners(cells: DirectionCells, bounds: StepBounds): CellPartners {
  return {
    later: cellsWithin(cells, bounds.ordinaryAngle, true),
    ordinary: cellsWithin(cells, bounds.ordinaryAngle),
    fast: cellsWithin(cells, bounds.fastAngle),
  };
}

/** What the pair finders share within one step. */
export type Sweep = {
  readonly step: StepStates;
  readonly halfStepS: number;
  readonly baseReachKm: number;
  /** eps of each object. */
  readonly toleranceKm: Float64Array;
  /** Reach of a straight line for the fastest pair at the Earth's surface: what no pair exceeds. */
  readonly widestReachKm: number;
  readonly partners: CellPartners;
  readonly pairs: NearPairs;
};

export function sweepOf(
  step: StepStates,
  bounds: StepBounds,
  toleranceKm: Float64Array,
  partners: CellPartners,
  pairs: NearPairs,
): Sweep {
  return {
    step,
    halfStepS: bounds.halfStepS,
    baseReachKm: bounds.baseReachKm,
    toleranceKm,
    widestReachKm: lineReachKm(
      bounds.halfStepS,
      bounds.widestReachKm,
      tidePerS2(EARTH_RADIUS_KM - 1),
      FASTEST_RELATIVE_KM_PER_S,
    ),
    partners,
    pairs,
  };
}

/** Bound 4 of `bounds.ts` on a pair whose records start at i and k. */
function lookAtLine(
  sweep: Sweep,
  recordsA: Float32Array,
  i: number,
  recordsB: Float32Array,
  k: number,
  a: number,
  b: number,
): void {
  const { halfStepS, widestReachKm, step } = sweep;
  const x = recordsB[k] - recordsA[i];
  const y = recordsB[k + 1] - recordsA[i + 1];
  const z = recordsB[k + 2] - recordsA[i + 2];
  const vx = recordsB[k + 3] - recordsA[i + 3];
  const vy = recordsB[k + 4] - recordsA[i + 4];
  const vz = recordsB[k + 5] - recordsA[i + 5];
  const distance2 = x * x + y * y + z * z;
  const along = x * vx + y * vy + z * vz;
  const speed2 = vx * vx + vy * vy + vz * vz;
  const absAlong = Math.abs(along);
  const inside = absAlong <= speed2 * halfStepS;
  // Squared distance of the line times speed2 where the nearest point lies inside the step.
  const line = inside
    ? distance2 * speed2 - along * along
    : distance2 + halfStepS * (halfStepS * speed2 - 2 * absAlong);
  const unit = inside ? speed2 : 1;
  if (line > widestReachKm * widestReachKm * unit) return;
  const tide = tidePerS2(shellFloorKm(Math.min(step.low[a], step.low[b])));
  const reachKm = sweep.baseReachKm + sweep.toleranceKm[a] + sweep.toleranceKm[b];
  const reach = lineReachKm(halfStepS, reachKm, tide, Math.sqrt(speed2));
  if (line > reach * reach * unit) return;
  const { pairs } = sweep;
  if (pairs.size === pairs.first.length) {
    pairs.first = grown(pairs.first);
    pairs.second = grown(pairs.second);
  }
  pairs.first[pairs.size] = Math.min(a, b);
  pairs.second[pairs.size++] = Math.max(a, b);
}

function grown(array: Int32Array): Int32Array {
  const larger = new Int32Array(2 * array.length);
  larger.set(array);
  return larger;
}

/** Pairs of the objects of a grid with each other. */
export function findPairsWithin(sweep: Sweep, grid: DirectionGrid): void {
  const { later } = sweep.partners;
  const { cellStart } = grid;
  const cellCount = cellStart.length - 1;
  for (let home = 0; home < cellCount; home++) {
    const start = cellStart[home];
    const end = cellStart[home + 1];
    if (start === end) continue;
    sweepColumn(sweep, grid, start, end);
    for (let n = later.start[home]; n < later.start[home + 1]; n++) {
      const otherStart = cellStart[later.cells[n]];
      const otherEnd = cellStart[later.cells[n] + 1];
      if (otherStart < otherEnd) sweepColumns(sweep, grid, start, end, grid, otherStart, otherEnd);
    }
  }
}

/** Pairs between the objects of two grids, the second one without steep objects. */
export function findPairsAcross(sweep: Sweep, grid: DirectionGrid, otherGrid: DirectionGrid): void {
  const { ordinary } = sweep.partners;
  const { cellStart } = grid;
  const otherStart = otherGrid.cellStart;
  const cellCount = cellStart.length - 1;
  for (let home = 0; home < cellCount; home++) {
    const start = cellStart[home];
    const end = cellStart[home + 1];
    if (start === end) continue;
    for (let n = ordinary.start[home]; n < ordinary.start[home + 1]; n++) {
      const cell = ordinary.cells[n];
      sweepColumns(sweep, grid, start, end, otherGrid, otherStart[cell], otherStart[cell + 1]);
    }
  }
}

/** Pairs within one column. */
function sweepColumn(sweep: Sweep, grid: DirectionGrid, start: number, end: number): void {
  const { object, low, high, records } = grid;
  const { halfStepS, widestReachKm } = sweep;
  let visits = 0;
  for (let i = start; i < end; i++) {
    const top = high[i];
    const from = RECORD_SIZE * i;
    const x = records[from];
    const y = records[from + 1];
    const z = records[from + 2];
    const own = records[from + 6] * halfStepS + widestReachKm;
    let k = i + 1;
    for (; k < end && low[k] <= top; k++) {
      const at = RECORD_SIZE * k;
      const dx = records[at] - x;
      const dy = records[at + 1] - y;
      const dz = records[at + 2] - z;
      const far = records[at + 6] * halfStepS + own;
      if (dx * dx + dy * dy + dz * dz > far * far) continue;
      lookAtLine(sweep, records, from, records, at, object[i], object[k]);
    }
    visits += k - i - 1;
  }
  sweep.pairs.visits += visits;
}

/**
 * Pairs between two columns. Most fail by being further apart than half a step at the sum of their speeds,
 * so that nothing else is read of them.
 */
function sweepColumns(
  sweep: Sweep,
  grid: DirectionGrid,
  start: number,
  end: number,
  otherGrid: DirectionGrid,
  otherStart: number,
  otherEnd: number,
): void {
  const { records } = grid;
  const { low, high, highest, records: others } = otherGrid;
  const { halfStepS, widestReachKm } = sweep;
  let visits = 0;
  let first = otherStart;
  for (let i = start; i < end; i++) {
    const bottom = grid.low[i];
    const top = grid.high[i];
    // Columns rise in `low` and `highest`: whoever ends below this one ends below all that follow it.
    while (first < otherEnd && highest[first] < bottom) first++;
    if (first === otherEnd) break;
    const from = RECORD_SIZE * i;
    const x = records[from];
    const y = records[from + 1];
    const z = records[from + 2];
    const own = records[from + 6] * halfStepS + widestReachKm;
    let k = first;
    for (; k < otherEnd && low[k] <= top; k++) {
      const at = RECORD_SIZE * k;
      const dx = others[at] - x;
      const dy = others[at + 1] - y;
      const dz = others[at + 2] - z;
      const far = others[at + 6] * halfStepS + own;
      if (dx * dx + dy * dy + dz * dz > far * far || high[k] < bottom) continue;
      lookAtLine(sweep, records, from, others, at, grid.object[i], otherGrid.object[k]);
    }
    visits += k - first;
  }
  sweep.pairs.visits += visits;
}

/**
 * Pairs between objects that are not in a grid and those that are.
 *
 * @param objects object indices, `count` of them, evaluated in `step`
 */
export function findPairsWithGrid(
  sweep: Sweep,
  grid: DirectionGrid,
  objects: Int32Array,
  count: number,
): void {
  if (grid.size === 0) return;
  const { step, partners, pairs } = sweep;
  const { cellStart, object, low, high, records: sorted } = grid;
  const { records } = step;
  const { halfStepS, widestReachKm } = sweep;
  let visits = 0;
  for (let m = 0; m < count; m++) {
    const a = objects[m];
    const home = step.cell[a];
    const bottom = step.low[a];
    const top = step.high[a];
    const from = RECORD_SIZE * a;
    const x = records[from];
    const y = records[from + 1];
    const z = records[from + 2];
    const own = records[from + 6] * halfStepS + widestReachKm;
    const lists = step.kind[a] === FAST ? partners.fast : partners.ordinary;
    for (let n = lists.start[home]; n < lists.start[home + 1]; n++) {
      const end = cellStart[lists.cells[n] + 1];
      for (let k = cellStart[lists.cells[n]]; k < end && low[k] <= top; k++) {
        if (high[k] < bottom) continue;
        visits++;
        const at = RECORD_SIZE * k;
        const dx = sorted[at] - x;
        const dy = sorted[at + 1] - y;
        const dz = sorted[at + 2] - z;
        const far = sorted[at + 6] * halfStepS + own;
        if (dx * dx + dy * dy + dz * dz > far * far) continue;
        lookAtLine(sweep, records, from, sorted, at, a, object[k]);
      }
    }
  }
  pairs.visits += visits;
}

/** Pairs between the objects of two lists, or within one list that is given twice. */
export function findPairsOfLists(
  sweep: Sweep,
  first: Int32Array,
  firstCount: number,
  second: Int32Array,
  secondCount: number,
): void {
  const { low, high, records } = sweep.step;
  for (let i = 0; i < firstCount; i++) {
    const a = first[i];
    for (let k = first === second ? i + 1 : 0; k < secondCount; k++) {
      const b = second[k];
      if (low[a] > high[b] || low[b] > high[a]) continue;
      lookAtLine(sweep, records, RECORD_SIZE * a, records, RECORD_SIZE * b, a, b);
    }
  }
}
