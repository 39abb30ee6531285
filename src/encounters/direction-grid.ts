import { type DirectionCells, directionCells } from './direction-cells.js';
import { SHELLS } from './shell.js';
import { RECORD_SIZE, type StepStates } from './step-states.js';

/**
 * Objects sorted by the cell of their direction from the Earth's center and, within a cell, by the lower
 * end of their radius interval: columns over the sphere, each in order of height. Cells are cubes of the
 * unit cube around the unit sphere, so that two directions within one edge of each other lie in the same
 * cell or in touching ones, poles included.
 */
export type DirectionGrid = {
  readonly cells: DirectionCells;
  /** First slot of each cell; one more than there are cells. */
  readonly cellStart: Int32Array;
  /** Number of slots in use. */
  size: number;
  /** Cell of each slot. */
  readonly cell: Int32Array;
  /** Object of each slot. */
  readonly object: Int32Array;
  /** Radius interval of each slot, as shell numbers. */
  readonly low: Int32Array;
  readonly high: Int32Array;
  /** The objects' records in the order of the slots, so that a column is read in one run. */
  readonly records: Float64Array;
};

/** @param reach largest chord between two directions that must be found in touching cells */
export function createDirectionGrid(capacity: number, reach: number): DirectionGrid {
  const cells = directionCells(reach);
  return {
    cells,
    cellStart: new Int32Array(cells.width ** 3 + 1),
    size: 0,
    cell: new Int32Array(capacity),
    object: new Int32Array(capacity),
    low: new Int32Array(capacity),
    high: new Int32Array(capacity),
    records: new Float64Array(RECORD_SIZE * capacity),
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
  if (byShell.length < count) byShell = new Int32Array(count);
  shellStart.fill(0);
  for (let k = 0; k < count; k++) shellStart[lows[objects[k]] + 1]++;
  for (let s = 0; s < SHELLS; s++) shellStart[s + 1] += shellStart[s];
  for (let k = 0; k < count; k++) byShell[shellStart[lows[objects[k]]]++] = objects[k];
  const { cellStart } = grid;
  cellStart.fill(0);
  for (let k = 0; k < count; k++) cellStart[cells[objects[k]] + 1]++;
  const cellCount = cellStart.length - 1;
  for (let c = 0; c < cellCount; c++) cellStart[c + 1] += cellStart[c];
  for (let k = 0; k < count; k++) {
    const object = byShell[k];
    const slot = cellStart[cells[object]]++;
    grid.object[slot] = object;
    grid.cell[slot] = cells[object];
    grid.low[slot] = lows[object];
    grid.high[slot] = highs[object];
    const from = RECORD_SIZE * object;
    const to = RECORD_SIZE * slot;
    for (let k = 0; k < RECORD_SIZE; k++) grid.records[to + k] = records[from + k];
  }
  // Each start has moved to the end of its cell, which is the start of the next.
  for (let c = cellCount; c > 0; c--) cellStart[c] = cellStart[c - 1];
  cellStart[0] = 0;
  grid.size = count;
}
