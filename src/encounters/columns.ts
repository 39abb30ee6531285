import type { CellLists } from './direction-cells.js';
import { SHELLS } from './shell.js';
import type { StepStates } from './step-states.js';

/**
 * For each cell of directions a column of objects in order of height: of their radius intervals' lower ends.
 * Which cells' objects a column holds is up to the lists that it is filled by.
 */
export type Columns = {
  /** First entry of each cell's column; one more than there are cells. */
  readonly start: Int32Array;
  /** `ENTRY_SIZE` numbers an entry: those of one entry share a line of the cache. */
  entries: Int32Array;
};

export const ENTRY_SIZE = 4;
/** Places in an entry: the object, its radius interval as shell numbers, the highest `HIGH` up to the entry. */
export const OBJECT = 0;
export const LOW = 1;
export const HIGH = 2;
export const HIGHEST = 3;

export function createColumns(cellCount: number): Columns {
  return { start: new Int32Array(cellCount + 1), entries: new Int32Array(0) };
}

const shellStart = new Int32Array(SHELLS + 1);

/**
 * Sorts objects by the lower ends of their radius intervals: a counting sort.
 *
 * @param objects indices of `count` objects in any fixed order
 * @param sorted receives them in order
 */
export function sortByHeight(objects: Int32Array, count: number, low: Int32Array, sorted: Int32Array): void {
  shellStart.fill(0);
  for (let k = 0; k < count; k++) shellStart[low[objects[k]] + 1]++;
  for (let s = 0; s < SHELLS; s++) shellStart[s + 1] += shellStart[s];
  for (let k = 0; k < count; k++) sorted[shellStart[low[objects[k]]]++] = objects[k];
}

/**
 * Fills columns with objects.
 *
 * @param sorted indices of `count` objects in order of height
 * @param lists for each cell, the cells whose columns receive its objects
 */
export function fillColumns(
  columns: Columns,
  sorted: Int32Array,
  count: number,
  { low: lows, high: highs, cell: cells }: StepStates,
  lists: CellLists,
): void {
  const { start } = columns;
  const { start: listStart, cells: list } = lists;
  const cellCount = start.length - 1;
  start.fill(0);
  const counts = countByCell(sorted, count, cells, cellCount);
  for (let cell = 0; cell < cellCount; cell++) {
    for (let n = listStart[cell]; n < listStart[cell + 1]; n++) start[list[n] + 1] += counts[cell];
  }
  for (let cell = 0; cell < cellCount; cell++) start[cell + 1] += start[cell];
  if (columns.entries.length < ENTRY_SIZE * start[cellCount]) {
    columns.entries = new Int32Array(Math.ceil(1.2 * ENTRY_SIZE * start[cellCount]));
  }
  const { entries } = columns;
  const next = counts;
  next.set(start.subarray(0, cellCount));
  for (let k = 0; k < count; k++) {
    const one = sorted[k];
    const cell = cells[one];
    const bottom = lows[one];
    const top = highs[one];
    for (let n = listStart[cell]; n < listStart[cell + 1]; n++) {
      const column = list[n];
      const entry = next[column]++;
      const at = ENTRY_SIZE * entry;
      entries[at] = one;
      entries[at + LOW] = bottom;
      entries[at + HIGH] = top;
      entries[at + HIGHEST] = entry > start[column] ? Math.max(top, entries[at + HIGHEST - ENTRY_SIZE]) : top;
    }
  }
}

let cellCounts = new Int32Array(0);

function countByCell(objects: Int32Array, count: number, cells: Int32Array, cellCount: number): Int32Array {
  if (cellCounts.length !== cellCount) cellCounts = new Int32Array(cellCount);
  cellCounts.fill(0);
  for (let k = 0; k < count; k++) cellCounts[cells[objects[k]]]++;
  return cellCounts;
}
