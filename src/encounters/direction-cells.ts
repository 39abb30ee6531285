/**
 * Cells of directions from the Earth's center: cubes of the unit cube around the unit sphere, so that two
 * directions within one edge of each other lie in the same cell or in touching ones, poles included.
 */
export type DirectionCells = {
  /** Cells along each axis, with a border of two empty ones so that no neighbor needs a range check. */
  readonly width: number;
  readonly cellsPerUnit: number;
};

/** @param reach largest chord between two directions that must lie in touching cells */
export function directionCells(reach: number): DirectionCells {
  const cellsPerUnit = 1 / Math.min(reach, 2);
  return { cellsPerUnit, width: Math.floor(2 * cellsPerUnit) + 5 };
}

/** Cell of a direction given as a unit vector. */
export function cellOf(cells: DirectionCells, x: number, y: number, z: number): number {
  const { cellsPerUnit: n, width } = cells;
  const ix = Math.floor((x + 1) * n) + 2;
  const iy = Math.floor((y + 1) * n) + 2;
  const iz = Math.floor((z + 1) * n) + 2;
  return (iz * width + iy) * width + ix;
}

/** Offsets of the 13 cells that, with their opposites, touch a cell. */
export function halfNeighborOffsets(width: number): Int32Array {
  return neighborOffsets(width, 1).filter((offset) => offset > 0);
}

/** Offsets of all cells up to `rings` away, the cell itself included, in rising order. */
export function neighborOffsets(width: number, rings: number): Int32Array {
  const offsets: number[] = [];
  for (let z = -rings; z <= rings; z++)
    for (let y = -rings; y <= rings; y++)
      for (let x = -rings; x <= rings; x++) offsets.push((z * width + y) * width + x);
  return Int32Array.from(offsets);
}
