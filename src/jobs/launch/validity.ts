import { dirname, resolve } from 'node:path';
import { formatUtc } from '../../elements/utc.js';
import { InputError } from '../../input-error.js';
import { readCsv } from '../../uncertainty/read-csv.js';
import { groupBy } from './group-by.js';
import { type BatchSet, objectNamed } from './read-batch.js';
import { timeCell } from './read-table.js';

/** When one set of the batch says where its object is; milliseconds of UTC since 1970-01-01. */
export type SetValidity = {
  readonly batchSet: BatchSet;
  /** Inclusive. */
  readonly fromMs: number;
  /** Exclusive; infinite where the cell is empty. */
  readonly toMs: number;
  /** In the table. */
  readonly line: number;
};

/**
 * Reads from when to when each set of the batch holds: CSV (see `readCsv`) with the columns `name` (or
 * designator), `file` (path from the folder of the table), `valid_from` and `valid_until` (empty: for good).
 * Every set has one row, and those of one object do not overlap.
 *
 * @param file as the user named it, for errors
 * @throws InputError with file, line and value
 */
export function readValidity(
  text: string,
  file: string,
  paths: readonly string[],
  sets: readonly BatchSet[],
): SetValidity[] {
  const rows: SetValidity[] = [];
  for (const record of readCsv(text, file, ['name', 'file', 'valid_from', 'valid_until'], [])) {
    const where = `${file}:${record.line}`;
    const path = paths.find((each) => isSameFile(record.cells.file, file, each));
    if (path === undefined) {
      throw new InputError(
        `${where}: file is ${JSON.stringify(record.cells.file)}, which no --batch names (${paths.join(', ')})`,
      );
    }
    const ofFile = sets.filter(({ set }) => set.source.file === path);
    const batchSet = objectNamed(record.cells.name, ofFile, where);
    const earlier = rows.find((row) => row.batchSet === batchSet);
    if (earlier !== undefined) {
      throw new InputError(
        `${where}: the set of ${batchSet.set.designator} in ${path} is already on line ${earlier.line}: leave one row a set`,
      );
    }
    const fromMs = timeCell(record, file, 'valid_from');
    const toMs =
      record.cells.valid_until === '' ? Number.POSITIVE_INFINITY : timeCell(record, file, 'valid_until');
    if (toMs <= fromMs) {
      throw new InputError(
        `${where}: valid_until is ${formatUtc(toMs)}, not after valid_from, ${formatUtc(fromMs)}`,
      );
    }
    rows.push({ batchSet, fromMs, toMs, line: record.line });
  }
  const missing = sets.filter((each) => !rows.some((row) => row.batchSet === each));
  if (missing.length > 0) {
    const { source, designator } = missing[0].set;
    const more = missing.length === 1 ? '' : ` and ${missing.length - 1} more sets`;
    throw new InputError(
      `${file}: no row for the set of ${designator} at ${source.file}:${source.line}${more}: say from when to when it holds`,
    );
  }
  refuseOverlaps(rows, file);
  return rows;
}

function refuseOverlaps(rows: readonly SetValidity[], file: string): void {
  const byObject = groupBy(rows, ({ batchSet }) => batchSet.set.designator);
  for (const [designator, own] of byObject) {
    const sorted = own.toSorted((a, b) => a.fromMs - b.fromMs || a.line - b.line);
    for (let i = 1; i < sorted.length; i++) {
      const [before, after] = [sorted[i - 1], sorted[i]];
      if (after.fromMs >= before.toMs) continue;
      const until = Number.isFinite(before.toMs)
        ? `holds until ${formatUtc(before.toMs)}`
        : 'has no valid_until';
      throw new InputError(
        `${file}:${after.line}: valid_from is ${formatUtc(after.fromMs)}, but the set of ${designator} on line ${before.line} ${until}: only one set can hold at a time`,
      );
    }
  }
}

function isSameFile(cell: string, table: string, path: string): boolean {
  return cell === path || (path !== '-' && resolve(dirname(table), cell) === resolve(path));
}
