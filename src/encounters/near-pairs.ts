import { EARTH_RADIUS_KM } from '../ephemeris/gravity.js';
import { FASTEST_RELATIVE_KM_PER_S, lineReachKm, passesNear, type StepBounds, tidePerS2 } from './bounds.js';
import { type CellLists, cellsWithin, type DirectionCells, filterLists } from './direction-cells.js';
import { shellFloorKm } from './shell.js';
import {
  FAST,
  FLAT,
  OTHER_FAST,
  OTHER_FLAT,
  OTHER_STEEP,
  RECORD_LOW,
  RECORD_SIZE,
  STEEP,
  type StepKernel,
} from './step-kernel.js';

/** Pairs of one step whose straight lines pass close enough to be looked at on their tracks. */
export type NearPairs = { size: number; first: Int32Array; second: Int32Array };

export function createNearPairs(): NearPairs {
  return { size: 0, first: new Int32Array(1024), second: new Int32Array(1024) };
}

/** Numbers of the lists of cells that `listsOf` makes: which cells can hold a partner for an object in a cell. */
const ORDINARY = 0;
/** Of those, the cell itself and the ones with a higher number. */
const ORDINARY_LATER = 1;
/** Between an ordinary object and a fast one, and between two fast ones. */
const WITH_FAST = 2;
const BOTH_FAST = 3;
const BOTH_FAST_LATER = 4;

/** For each cell, the cells in which its objects can have a partner, by kinds of objects. */
export function listsOf(cells: DirectionCells, bounds: StepBounds): CellLists[] {
  const ordinary = cellsWithin(cells, bounds.ordinaryAngle);
  const fast = cellsWithin(cells, bounds.fastestAngle);
  const later = (cell: number, other: number) => other >= cell;
  return [
    ordinary,
    filterLists(ordinary, later),
    cellsWithin(cells, bounds.fastAngle),
    fast,
    filterLists(fast, later),
  ];
}

/** Reach of a straight line for the fastest pair at the Earth's surface: what no pair exceeds, km. */
function widestLineReachKm({ halfStepS, widestReachKm }: StepBounds): number {
  return lineReachKm(halfStepS, widestReachKm, tidePerS2(EARTH_RADIUS_KM - 1), FASTEST_RELATIVE_KM_PER_S);
}

/**
 * Hands over every pair that can come within reach in the step that the kernel has evaluated.
 *
 * @param every more than 1 for a sample: the pairs of every so many cells
 */
export function sweepStep(
  { sweep }: Pick<StepKernel, 'sweep'>,
  bounds: StepBounds,
  withinPrimaries: boolean,
  hasOthers: boolean,
  every = 1,
): void {
  const reachKm = widestLineReachKm(bounds);
  if (withinPrimaries) {
    sweep(FLAT, FLAT, ORDINARY_LATER, true, every, reachKm);
    sweep(STEEP, STEEP, ORDINARY_LATER, true, every, reachKm);
    sweep(STEEP, FLAT, ORDINARY, false, every, reachKm);
    sweep(FAST, FLAT, WITH_FAST, false, every, reachKm);
    sweep(FAST, STEEP, WITH_FAST, false, every, reachKm);
    sweep(FAST, FAST, BOTH_FAST_LATER, true, every, reachKm);
  }
  if (!hasOthers) return;
  for (const own of [FLAT, STEEP]) {
    sweep(own, OTHER_FLAT, ORDINARY, false, every, reachKm);
    sweep(OTHER_STEEP, own, ORDINARY, false, every, reachKm);
    sweep(OTHER_FAST, own, WITH_FAST, false, every, reachKm);
  }
  sweep(FAST, OTHER_FLAT, WITH_FAST, false, every, reachKm);
  sweep(FAST, OTHER_STEEP, WITH_FAST, false, every, reachKm);
  sweep(FAST, OTHER_FAST, BOTH_FAST, false, every, reachKm);
}

/**
 * Takes those of the pairs that pass bound 4 of `bounds.ts` with their own speed, height and tolerances.
 *
 * @param handed two object numbers a pair
 * @param records of all objects, as in `StepKernel`
 * @param toleranceKm eps of each object
 */
export function takeNearPairs(
  pairs: NearPairs,
  handed: Int32Array,
  records: Float32Array,
  { halfStepS, baseReachKm }: StepBounds,
  toleranceKm: Float64Array,
): void {
  for (let n = 0; n < handed.length; n += 2) {
    const a = handed[n];
    const b = handed[n + 1];
    const i = RECORD_SIZE * a;
    const k = RECORD_SIZE * b;
    const tide = tidePerS2(shellFloorKm(Math.min(records[i + RECORD_LOW], records[k + RECORD_LOW])));
    const reachKm = baseReachKm + toleranceKm[a] + toleranceKm[b];
    if (passesNear(records, i, k, halfStepS, reachKm, tide)) add(pairs, Math.min(a, b), Math.max(a, b));
  }
}

function add(pairs: NearPairs, first: number, second: number): void {
  if (pairs.size === pairs.first.length) {
    pairs.first = grown(pairs.first);
    pairs.second = grown(pairs.second);
  }
  pairs.first[pairs.size] = first;
  pairs.second[pairs.size++] = second;
}

function grown(array: Int32Array): Int32Array {
  const larger = new Int32Array(2 * array.length);
  larger.set(array);
  return larger;
}
