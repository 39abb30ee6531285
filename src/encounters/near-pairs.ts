import { EARTH_RADIUS_KM } from '../ephemeris/gravity.js';
import { FASTEST_RELATIVE_KM_PER_S, lineReachKm, type StepBounds, tidePerS2 } from './bounds.js';
import { type Columns, ENTRY_SIZE, HIGH, HIGHEST, LOW } from './columns.js';
import { type CellLists, cellsWithin, type DirectionCells, filterLists } from './direction-cells.js';
import { shellFloorKm } from './shell.js';
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

/** For each cell, cells in which its objects can have a partner. */
export type CellPartners = {
  /** The cell alone. */
  readonly own: CellLists;
  /** Between two ordinary objects. */
  readonly ordinary: CellLists;
  /** Of those the ones with a lower number: the columns filled by these hold the objects of later cells. */
  readonly earlier: CellLists;
  /** Between an ordinary object and a fast one. */
  readonly fast: CellLists;
};

export function cellPartners(cells: DirectionCells, bounds: StepBounds): CellPartners {
  const ordinary = cellsWithin(cells, bounds.ordinaryAngle);
  return {
    own: filterLists(ordinary, (cell, other) => other === cell),
    ordinary,
    earlier: filterLists(ordinary, (cell, other) => other < cell),
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
  readonly pairs: NearPairs;
};

export function sweepOf(
  step: StepStates,
  bounds: StepBounds,
  toleranceKm: Float64Array,
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
    pairs,
  };
}

/** Bound 4 of `bounds.ts` on a pair. */
function lookAt(sweep: Sweep, a: number, b: number): void {
  const { halfStepS, step } = sweep;
  const { records } = step;
  const i = RECORD_SIZE * a;
  const k = RECORD_SIZE * b;
  const x = records[k] - records[i];
  const y = records[k + 1] - records[i + 1];
  const z = records[k + 2] - records[i + 2];
  const vx = records[k + 3] - records[i + 3];
  const vy = records[k + 4] - records[i + 4];
  const vz = records[k + 5] - records[i + 5];
  const distance2 = x * x + y * y + z * z;
  const along = x * vx + y * vy + z * vz;
  const speed2 = vx * vx + vy * vy + vz * vz;
  const absAlong = Math.abs(along);
  const inside = absAlong <= speed2 * halfStepS;
  // Squared distance of the line times speed2 where the nearest point lies inside the step.
  const line = inside
    ? distance2 * speed2 - along * along
    : distance2 + halfStepS * (halfStepS * speed2 - 2 * absAlong);
  const tide = tidePerS2(shellFloorKm(Math.min(step.low[a], step.low[b])));
  const reachKm = sweep.baseReachKm + sweep.toleranceKm[a] + sweep.toleranceKm[b];
  const reach = lineReachKm(halfStepS, reachKm, tide, Math.sqrt(speed2));
  if (line > reach * reach * (inside ? speed2 : 1)) return;
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

/**
 * Pairs of the objects of one kind with each other.
 *
 * @param own the columns of the cells
 * @param later the columns of what lies in later cells within reach
 */
export function findPairsWithin(sweep: Sweep, own: Columns, later: Columns): void {
  const cellCount = own.start.length - 1;
  for (let cell = 0; cell < cellCount; cell++) {
    const start = own.start[cell];
    const end = own.start[cell + 1];
    if (start === end) continue;
    sweepColumn(sweep, own, start, end);
    sweepColumns(sweep, own, start, end, later, later.start[cell], later.start[cell + 1]);
  }
}

/** Pairs between objects in two sets of columns, cell by cell; the second without steep objects. */
export function findPairsAcross(sweep: Sweep, columns: Columns, others: Columns): void {
  const cellCount = columns.start.length - 1;
  for (let cell = 0; cell < cellCount; cell++) {
    const start = columns.start[cell];
    const end = columns.start[cell + 1];
    if (start === end) continue;
    sweepColumns(sweep, columns, start, end, others, others.start[cell], others.start[cell + 1]);
  }
}

/** Pairs within one column. */
function sweepColumn(sweep: Sweep, { entries }: Columns, start: number, end: number): void {
  const last = ENTRY_SIZE * end;
  for (let i = ENTRY_SIZE * start; i < last; i += ENTRY_SIZE) {
    sweepRun(sweep, entries[i], entries[i + LOW], entries[i + HIGH], entries, i + ENTRY_SIZE, last);
  }
}

/** Pairs between two columns. */
function sweepColumns(
  sweep: Sweep,
  { entries }: Columns,
  start: number,
  end: number,
  others: Columns,
  otherStart: number,
  otherEnd: number,
): void {
  const last = ENTRY_SIZE * otherEnd;
  let first = ENTRY_SIZE * otherStart;
  for (let i = ENTRY_SIZE * start; i < ENTRY_SIZE * end; i += ENTRY_SIZE) {
    const bottom = entries[i + LOW];
    // Columns rise in `LOW` and `HIGHEST`: whoever ends below this one ends below all that follow it.
    while (first < last && others.entries[first + HIGHEST] < bottom) first += ENTRY_SIZE;
    if (first === last) break;
    sweepRun(sweep, entries[i], bottom, entries[i + HIGH], others.entries, first, last);
  }
}

/**
 * Looks at an object and those of a run of entries that start no higher than it ends. Here the search spends
 * most of its time: nearly all pairs fail by the distance at which the straight lines of their motion pass.
 */
function sweepRun(
  sweep: Sweep,
  a: number,
  bottom: number,
  top: number,
  entries: Int32Array,
  from: number,
  to: number,
): void {
  const { records } = sweep.step;
  const widest2 = sweep.widestReachKm * sweep.widestReachKm;
  const i = RECORD_SIZE * a;
  const x = records[i];
  const y = records[i + 1];
  const z = records[i + 2];
  const vx = records[i + 3];
  const vy = records[i + 4];
  const vz = records[i + 5];
  let k = from;
  for (; k < to && entries[k + LOW] <= top; k += ENTRY_SIZE) {
    const at = RECORD_SIZE * entries[k];
    const dx = records[at] - x;
    const dy = records[at + 1] - y;
    const dz = records[at + 2] - z;
    const dvx = records[at + 3] - vx;
    const dvy = records[at + 4] - vy;
    const dvz = records[at + 5] - vz;
    const along = dx * dvx + dy * dvy + dz * dvz;
    const speed2 = dvx * dvx + dvy * dvy + dvz * dvz;
    if ((dx * dx + dy * dy + dz * dz - widest2) * speed2 > along * along) continue;
    if (entries[k + HIGH] >= bottom) lookAt(sweep, a, entries[k]);
  }
  sweep.pairs.visits += (k - from) / ENTRY_SIZE;
}

/**
 * Pairs between listed objects and those in columns.
 *
 * @param objects object indices, `count` of them
 * @param lists for each cell, the columns that can hold partners of its objects
 */
export function findPairsWithColumns(
  sweep: Sweep,
  objects: Int32Array,
  count: number,
  { start, entries }: Columns,
  lists: CellLists,
): void {
  const { cell, low, high } = sweep.step;
  for (let m = 0; m < count; m++) {
    const a = objects[m];
    const home = cell[a];
    for (let n = lists.start[home]; n < lists.start[home + 1]; n++) {
      const last = ENTRY_SIZE * start[lists.cells[n] + 1];
      let first = ENTRY_SIZE * start[lists.cells[n]];
      while (first < last && entries[first + HIGHEST] < low[a]) first += ENTRY_SIZE;
      if (first < last) sweepRun(sweep, a, low[a], high[a], entries, first, last);
    }
  }
}

/** Pairs between the objects of two lists, or within one list that is given twice. */
export function findPairsOfLists(
  sweep: Sweep,
  first: Int32Array,
  firstCount: number,
  second: Int32Array,
  secondCount: number,
): void {
  const { low, high } = sweep.step;
  for (let i = 0; i < firstCount; i++) {
    const a = first[i];
    for (let k = first === second ? i + 1 : 0; k < secondCount; k++) {
      const b = second[k];
      if (low[a] <= high[b] && low[b] <= high[a]) lookAt(sweep, a, b);
    }
  }
}
