import { SHELLS } from './shell.js';
import { RECORD_SIZE, type StepStates } from './step-states.js';

/**
 * Objects sorted by the cell of their direction from the Earth's center and, within a cell, by the lower
 * end of their radius interval: columns over the sphere, each in order of height.
 */
export type DirectionGrid = {
  /** First slot of each cell; one more than there are cells. */
  readonly cellStart: Int32Array;
  /** Number of slots in use. */
  size: number;
  /** Object of each slot. */
  readonly object: Int32Array;
  /** Radius interval of each slot, as shell numbers. */
  readonly low: Int32Array;
  readonly high: Int32Array;
  /** Highest `high` of the column up to each slot. */
  readonly highest: Int32Array;
  /** The objects' records in the order of the slots, so that a column is read in one run. */
  readonly records: Float32Array;
};

export function createDirectionGrid(capacity: number, cellCount: number): DirectionGrid {
  return {
    cellStart: new Int32Array(cellCount + 1),
    size: 0,
    object: new Int32Array(capacity),
    low: new Int32Array(capacity),
    high: new Int32Array(capacity),
    highest: new Int32Array(capacity),
    records: new Float32Array(RECORD_SIZE * capacity),
  };
}

const shellStart = new Int32Array(SHELLS + 1);
let byShell = new Int32Array(0);

/**
 * Fills the grid: a counting sort by shell, then a stable one by cell.
 *
 * @param objects indices of the objects to hold, `count` of them in any fixed order
 */
export function fillDirectionGrid(
  grid: DirectionGrid,
  objects: Int32Array,
  count: number,
  step: StepStates,
): void {
  const { cell: cells, low: lows, high: highs, records } = step;
  const { cellStart } = grid;
  if (byShell.length < count) byShell = new Int32Array(count);
  shellStart.fill(0);
  cellStart.fill(0);
  for (let k = 0; k < count; k++) {
    const object = objects[k];
    shellStart[lows[object] + 1]++;
    cellStart[cells[object] + 1]++;
  }
  for (let s = 0; s < SHELLS; s++) shellStart[s + 1] += shellStart[s];
  const cellCount = cellStart.length - 1;
  for (let c = 0; c < cellCount; c++) cellStart[c + 1] += cellStart[c];
  for (let k = 0; k < count; k++) {
    const object = objects[k];
    byShell[shellStart[lows[object]]++] = object;
  }
  const { object: slots, low, high, records: sorted } = grid;
  for (let k = 0; k < count; k++) {
    const object = byShell[k];
    const slot = cellStart[cells[object]]++;
    slots[slot] = object;
    low[slot] = lows[object];
    high[slot] = highs[object];
    const from = RECORD_SIZE * object;
    const to = RECORD_SIZE * slot;
    sorted[to] = records[from];
    sorted[to + 1] = records[from + 1];
    sorted[to + 2] = records[from + 2];
    sorted[to + 3] = records[from + 3];
    sorted[to + 4] = records[from + 4];
    sorted[to + 5] = records[from + 5];
    sorted[to + 6] = records[from + 6];
  }
  const { highest } = grid;
  for (let c = 0, slot = 0; c < cellCount; c++) {
    // Each start has moved to the end of its cell.
    let top = -1;
    for (; slot < cellStart[c]; slot++) {
      if (high[slot] > top) top = high[slot];
      highest[slot] = top;
    }
  }
  // Each start has moved to the end of its cell, which is the start of the next.
  for (let c = cellCount; c > 0; c--) cellStart[c] = cellStart[c - 1];
  cellStart[0] = 0;
  grid.size = count;
}
