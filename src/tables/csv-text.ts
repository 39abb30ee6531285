import { Readable, type Writable } from 'node:stream';
import { pipeline } from 'node:stream/promises';
import { formatUtc } from '../elements/utc.js';

/*
 * The one way in which all CSV files are written: RFC 4180, comma, CRLF after every record, one header
 * record, UTF-8 without a byte order mark. A cell without a figure is empty.
 *
 * csv-stringify spends some five times as long on a row of 33 columns, and its guard against formulas
 * cannot tell a negative number in text form from a formula; hence these few functions.
 */

/** One column of a table: what the header says, what the README and the help say, and how a cell is made. */
export type CsvColumn<Row> = {
  readonly name: string;
  /** `''` where there is none. */
  readonly unit: string;
  readonly meaning: string;
  /** The finished cell, quoted where need be. `number` counts the rows from 1. */
  readonly cell: (row: Row, number: number) => string;
};

const NEEDS_QUOTES = /[",\r\n]/;
const RUNS_AS_FORMULA = /^'*\s*[=+\-@\t\r\n\uFF1D\uFF0B\uFF0D\uFF20]/;
const CHUNK_LENGTH = 1 << 16;
const LARGEST_EXACT = 2 ** 53;
const MS_PER_DAY = 86_400_000;
const TWO_DIGITS = Array.from({ length: 60 }, (_, i) => String(i).padStart(2, '0'));
/** `YYYY-MM-DDT` by day since 1970-01-01. */
const dates = new Map<number, string>();

/**
 * A cell of free text, such as a name.
 *
 * Text that a spreadsheet would run as a formula (after blanks, if any, it starts with `=`, `+`, `-`, `@`
 * or their full-width forms, or it starts with a tab or a line break) gets one apostrophe in front. So
 * does text that already looks like that behind apostrophes, hence taking one apostrophe away from such a
 * cell always gives the text back. All other text stays as it is.
 */
export function textCell(text: string): string {
  const safe = RUNS_AS_FORMULA.test(text) ? `'${text}` : text;
  return NEEDS_QUOTES.test(safe) ? `"${safe.replaceAll('"', '""')}"` : safe;
}

/** A number with `decimals` digits after the point, no exponent; empty where there is no finite figure. */
export function fixedCell(value: number | undefined, decimals: 1 | 3 | 4 | 6 | 9): string {
  if (value === undefined || !Number.isFinite(value)) return '';
  const unit = 10 ** decimals;
  const digits = Math.round(Math.abs(value) * unit);
  if (digits >= LARGEST_EXACT) return value.toFixed(decimals);
  // Twice as fast as toFixed, and never "-0.000".
  const fraction = digits % unit;
  const sign = value < 0 && digits !== 0 ? '-' : '';
  return `${sign}${(digits - fraction) / unit}.${String(fraction + unit).slice(1)}`;
}

/** A number in exponent form with six significant digits, `1.23457E-05`; empty where there is no finite figure. */
export function exponentCell(value: number | undefined): string {
  if (value === undefined || !Number.isFinite(value)) return '';
  return exponentText(value, 5);
}

/** `value` as `1.2346E-05`: `decimals` digits after the point, an exponent of two digits at least. */
export function exponentText(value: number, decimals: number): string {
  const text = value.toExponential(decimals);
  const mark = text.indexOf('e');
  return `${text.slice(0, mark)}E${text[mark + 1]}${text.slice(mark + 2).padStart(2, '0')}`;
}

/** A time as `YYYY-MM-DDThh:mm:ss.mmmZ` (ISO 8601, UTC); empty where there is none. */
export function utcCell(ms: number | undefined): string {
  if (ms === undefined || !Number.isFinite(ms)) return '';
  // Date.toISOString alone would take a third of the time of a whole row: it is called once a day of the window.
  const rounded = Math.round(ms);
  const day = Math.floor(rounded / MS_PER_DAY);
  let date = dates.get(day);
  if (date === undefined) {
    date = formatUtc(day * MS_PER_DAY).slice(0, -'00:00:00.000Z'.length);
    dates.set(day, date);
  }
  const msOfDay = rounded - day * MS_PER_DAY;
  const second = Math.floor(msOfDay / 1000);
  const minute = Math.floor(second / 60);
  const clock = `${TWO_DIGITS[Math.floor(minute / 60)]}:${TWO_DIGITS[minute % 60]}:${TWO_DIGITS[second % 60]}`;
  return `${date}${clock}.${String((msOfDay % 1000) + 1000).slice(1)}Z`;
}

/** The header record with its CRLF. */
export function csvHeader<Row>(columns: readonly CsvColumn<Row>[]): string {
  return `${columns.map((column) => textCell(column.name)).join(',')}\r\n`;
}

/** One record with its CRLF. */
export function csvRow<Row>(columns: readonly CsvColumn<Row>[], row: Row, number: number): string {
  let record = columns[0].cell(row, number);
  for (let i = 1; i < columns.length; i++) record += `,${columns[i].cell(row, number)}`;
  return `${record}\r\n`;
}

/**
 * Writes a table to `output` and ends it. Memory stays bounded: rows are taken only as fast as `output`
 * takes them.
 *
 * @returns the number of rows written, the header not counted
 * @throws what `output` or `rows` throws; `output` is then destroyed
 */
export async function writeCsv<Row>(
  output: Writable,
  columns: readonly CsvColumn<Row>[],
  rows: Iterable<Row> | AsyncIterable<Row>,
): Promise<number> {
  let count = 0;
  async function* chunks(): AsyncGenerator<string> {
    let chunk = csvHeader(columns);
    for await (const row of rows) {
      chunk += csvRow(columns, row, ++count);
      if (chunk.length >= CHUNK_LENGTH) {
        yield chunk;
        chunk = '';
      }
    }
    yield chunk;
  }
  await pipeline(Readable.from(chunks()), output);
  return count;
}
