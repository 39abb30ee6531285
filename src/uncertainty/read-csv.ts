import { type Info, parse } from 'csv-parse/sync';
import { InputError } from '../input-error.js';

/** One record of a table: where it ends in the file, and its cells by column, blanks around them removed. */
export type CsvRecord = {
  readonly line: number;
  /** `''` for an empty cell and for an optional column that the file lacks. */
  readonly cells: Readonly<Record<string, string>>;
};

/**
 * Reads a table with a header record: comma, RFC 4180 quotes, columns in any order, empty lines and lines
 * that start with `#` skipped.
 *
 * @param file as the user named it, for errors
 * @throws InputError for a file that is no such table: a column unknown, missing or named twice, too few or
 * too many cells, quotes that do not close
 */
export function readCsv(
  text: string,
  file: string,
  required: readonly string[],
  optional: readonly string[],
): CsvRecord[] {
  const [header, ...records] = rowsOf(text, file);
  const known = [...required, ...optional];
  if (header === undefined) {
    throw new InputError(`${file} is empty: give a header line with the columns ${known.join(',')}`);
  }
  const columns = header.cells;
  for (const [i, column] of columns.entries()) {
    if (!known.includes(column)) {
      throw new InputError(
        `${file}:${header.line}: unknown column ${JSON.stringify(column)}: the columns are ${known.join(',')}`,
      );
    }
    if (columns.indexOf(column) !== i) {
      throw new InputError(`${file}:${header.line}: the column ${column} is there twice: take one away`);
    }
  }
  const missing = required.filter((column) => !columns.includes(column));
  if (missing.length > 0) {
    throw new InputError(
      `${file}:${header.line}: column ${missing.join(',')} is missing: add it to the header`,
    );
  }
  const absent = Object.fromEntries(optional.map((column) => [column, '']));
  return records.map(({ line, cells }) => {
    if (cells.length !== columns.length) {
      throw new InputError(
        `${file}:${line}: ${cells.length} cells, expected ${columns.length} as in the header`,
      );
    }
    return {
      line,
      cells: { ...absent, ...Object.fromEntries(columns.map((column, i) => [column, cells[i]])) },
    };
  });
}

function rowsOf(text: string, file: string): { line: number; cells: string[] }[] {
  try {
    const rows = parse(text, {
      bom: true,
      comment: '#',
      comment_no_infix: true,
      info: true,
      relax_column_count: true,
      skip_empty_lines: true,
      trim: true,
    }) as unknown as { info: Info; record: string[] }[];
    return rows.map(({ info, record }) => ({ line: info.lines, cells: record }));
  } catch (error) {
    const line = (error as { lines?: number }).lines;
    const where = line === undefined ? file : `${file}:${line}`;
    throw new InputError(`${where}: not readable as CSV: ${(error as Error).message}`, { cause: error });
  }
}

/**
 * A cell as a number.
 *
 * @param expected what the number must be, in words for the error, and the test of it
 * @throws InputError with file, line, column and value
 */
export function numberCell(
  record: CsvRecord,
  file: string,
  column: string,
  expected: readonly [words: string, test: (value: number) => boolean],
): number {
  const text = record.cells[column];
  // Number() alone would take '', '0x10' and '1e999'.
  const value = /^[-+]?(\d+\.?\d*|\.\d+)(e[-+]?\d+)?$/i.test(text) ? Number(text) : Number.NaN;
  if (!Number.isFinite(value) || !expected[1](value)) {
    throw new InputError(
      `${file}:${record.line}: ${column} is ${JSON.stringify(text)}, expected ${expected[0]}`,
    );
  }
  return value;
}
