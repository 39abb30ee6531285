/**
 * Cells of directions from the Earth's center: rows of latitude, each cut into cells of longitude. Which
 * cells can hold directions within a given angle of each other is worked out once, from the edges of the
 * cells, poles included; nothing hangs on the shape of the cells but speed.
 */
export type DirectionCells = {
  readonly count: number;
  /** Row of each band of equal height of the unit sphere. */
  readonly rowOfBand: Int32Array;
  readonly firstCell: Int32Array;
  /** Cells per octant of longitude, by row. */
  readonly cellsPerOctant: Float64Array;
  readonly lastCell: Int32Array;
  /** Edges of the rows, radians of latitude; a row without bands is empty. */
  readonly south: Float64Array;
  readonly north: Float64Array;
};

/** For each cell a list of cells: those of cell c are `cells` from `start[c]` to before `start[c + 1]`. */
export type CellLists = { readonly start: Int32Array; readonly cells: Int32Array };

export const BANDS = 4096;
/** Rows and cells per angle between two objects that can meet. */
const ROWS_PER_ANGLE = 1;
const CELLS_PER_ANGLE = 1;
/** Edges of rows lie on edges of bands, and cells of a row differ in width by so much. */
const ROW_SLACK = 2.5 / BANDS;
const CELL_SLACK = 1.02;
/** Covers the rounding of directions and edges, radians. */
const EDGE_ANGLE = 1e-9;

/** @param angle the angle that cells are laid out for, radians */
export function directionCells(angle: number): DirectionCells {
  const rows = Math.max(1, Math.floor((Math.PI * ROWS_PER_ANGLE) / (angle + ROW_SLACK)));
  const rowOfBand = new Int32Array(BANDS + 1);
  const south = new Float64Array(rows).fill(Number.POSITIVE_INFINITY);
  const north = new Float64Array(rows).fill(Number.NEGATIVE_INFINITY);
  for (let band = 0; band < BANDS; band++) {
    const middle = Math.asin((2 * band + 1) / BANDS - 1);
    const row = Math.floor((middle / Math.PI + 0.5) * rows);
    rowOfBand[band] = row;
    south[row] = Math.min(south[row], Math.asin((2 * band) / BANDS - 1));
    north[row] = Math.max(north[row], Math.asin((2 * band + 2) / BANDS - 1));
  }
  rowOfBand[BANDS] = rowOfBand[BANDS - 1];
  const firstCell = new Int32Array(rows);
  const lastCell = new Int32Array(rows);
  const cellsPerOctant = new Float64Array(rows);
  let count = 0;
  for (let row = 0; row < rows; row++) {
    // Near the poles a row can be without bands: no direction falls into its one cell.
    const isEmpty = south[row] > north[row];
    const width = (CELL_SLACK * longitudeReach(angle, Math.max(-south[row], north[row]))) / CELLS_PER_ANGLE;
    const cells = isEmpty ? 1 : Math.max(1, Math.floor((2 * Math.PI) / width));
    firstCell[row] = count;
    cellsPerOctant[row] = cells / 8;
    count += cells;
    lastCell[row] = count - 1;
  }
  return { count, rowOfBand, firstCell, cellsPerOctant, lastCell, south, north };
}

/**
 * Cell of a direction.
 *
 * @param x, y any multiple of the first two components of the unit vector
 * @param sinLatitude third component of the unit vector
 */
export function cellOf(cells: DirectionCells, x: number, y: number, sinLatitude: number): number {
  const row = cells.rowOfBand[((sinLatitude + 1) * (BANDS / 2)) | 0];
  const cell = cells.firstCell[row] + ((octantsOf(x, y) * cells.cellsPerOctant[row]) | 0);
  const last = cells.lastCell[row];
  return Math.min(cell, last);
}

/** Longitude in octants, 0 to 8, up to a wave of 0.002: rises with longitude, and costs no arc tangent. */
function octantsOf(x: number, y: number): number {
  const absX = Math.abs(x);
  const absY = Math.abs(y);
  const tangent = (absY - absX) / (absY + absX);
  const size = Math.abs(tangent);
  // Arc tangent by pi/4 t + t (1 - t) (0.2447 + 0.0663 t), good to 0.0015 rad (Rajan et al. 2006), over pi/4.
  let octants = 1 + tangent * (1 + (1 - size) * (0.31156 + 0.08442 * size));
  if (x < 0) octants = 4 - octants;
  return y < 0 ? 8 - octants : octants;
}

/** Cells that can hold a direction within `angle` of one in the cell, itself included, in rising order. */
export function cellsWithin(cells: DirectionCells, angle: number): CellLists {
  const near: Set<number>[] = Array.from({ length: cells.count }, () => new Set());
  const rows = cells.firstCell.length;
  const reach = angle + EDGE_ANGLE;
  for (let row = 0; row < rows; row++) {
    const edges = cellEdges(cells, row);
    for (let other = 0; other < rows; other++) {
      if (!(cells.south[row] - cells.north[other] <= reach && cells.south[other] - cells.north[row] <= reach))
        continue;
      // The circle around the direction that is further from its pole is the narrower one, and holds for both.
      const latitude = Math.min(
        Math.max(-cells.south[row], cells.north[row]),
        Math.max(-cells.south[other], cells.north[other]),
      );
      const turn = longitudeReach(reach, latitude) + EDGE_ANGLE;
      for (let c = 0; c + 1 < edges.length; c++) {
        const cell = cells.firstCell[row] + c;
        for (const found of cellsBetween(cells, other, edges[c] - turn, edges[c + 1] + turn)) {
          near[cell].add(found);
          near[found].add(cell);
        }
      }
    }
  }
  return cellLists(near.map((set) => [...set].sort((a, b) => a - b)));
}

/** The lists without the entries that `keep` refuses. */
export function filterLists(lists: CellLists, keep: (cell: number, other: number) => boolean): CellLists {
  return cellLists(
    Array.from({ length: lists.start.length - 1 }, (_, cell) =>
      [...lists.cells.subarray(lists.start[cell], lists.start[cell + 1])].filter((other) =>
        keep(cell, other),
      ),
    ),
  );
}

function cellLists(lists: readonly number[][]): CellLists {
  const start = new Int32Array(lists.length + 1);
  lists.forEach((list, cell) => {
    start[cell + 1] = start[cell] + list.length;
  });
  return { start, cells: Int32Array.from(lists.flat()) };
}

/** Half the range of longitudes of the circle of radius `angle` around a direction at `latitude`. */
function longitudeReach(angle: number, latitude: number): number {
  if (angle + latitude >= Math.PI / 2 - EDGE_ANGLE) return Math.PI;
  return Math.asin(Math.min(1, Math.sin(angle) / Math.cos(latitude)));
}

/** Longitudes of the edges of a row's cells, from 0 to 2 pi. */
function cellEdges(cells: DirectionCells, row: number): number[] {
  const count = cells.lastCell[row] - cells.firstCell[row] + 1;
  return Array.from({ length: count + 1 }, (_, c) => {
    if (c === 0) return 0;
    if (c === count) return 2 * Math.PI;
    let low = 0;
    let high = 2 * Math.PI;
    for (let iteration = 0; iteration < 50; iteration++) {
      const middle = (low + high) / 2;
      if (octantsOf(Math.cos(middle), Math.sin(middle)) * cells.cellsPerOctant[row] < c) low = middle;
      else high = middle;
    }
    return (low + high) / 2;
  });
}

/** Cells of a row that a range of longitudes touches. */
function cellsBetween(cells: DirectionCells, row: number, west: number, east: number): number[] {
  const first = cells.firstCell[row];
  const count = cells.lastCell[row] - first + 1;
  if (east - west >= 2 * Math.PI) return Array.from({ length: count }, (_, c) => first + c);
  const cellAt = (longitude: number) =>
    Math.min(
      count - 1,
      Math.floor(octantsOf(Math.cos(longitude), Math.sin(longitude)) * cells.cellsPerOctant[row]),
    );
  const from = cellAt(west);
  const steps = (cellAt(east) - from + count) % count;
  const all = steps === 0 && east - west > Math.PI;
  return Array.from({ length: all ? count : steps + 1 }, (_, c) => first + ((from + c) % count));
}
