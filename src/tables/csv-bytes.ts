import { exponentText, fixedCell, textCell, utcCell } from './csv-text.js';

/*
 * Cells as in csv-text.ts, but put straight into the bytes of a file: a string for each of the tens of
 * millions of cells of a large table would cost several times as much as the digits in it.
 */

/** Text that grows: UTF-8 in `bytes` up to `length`. */
export type CsvBytes = { bytes: Uint8Array; length: number };

/** Powers of ten from -290 to 290: products with them stay far from both ends of what doubles hold. */
const LARGEST_POWER = 290;
const POWERS_OF_TEN = Float64Array.from({ length: 2 * LARGEST_POWER + 1 }, (_, i) =>
  Number(`1e${i - LARGEST_POWER}`),
);
const LOG10_OF_2 = Math.log10(2);
/** A power of ten and a product are off by 1.1E-16 of themselves each: together by 2.2E-10 of the sixth digit. */
const ROUNDING_DOUBT = 1e-8;
const LARGEST_EXACT = 2 ** 53;
const BILLION = 1_000_000_000;
/** No number below takes more bytes. */
const LONGEST_NUMBER = 32;
const MS_PER_DAY = 86_400_000;
const [ZERO, POINT, MINUS, PLUS, EXPONENT, COLON, COMMA] = Buffer.from('0.-+E:,');
const [CARRIAGE_RETURN, LINE_FEED, Z] = Buffer.from('\r\nZ');
const ZERO_IN_EXPONENT_FORM = Buffer.from(exponentText(0, 5));
const encoder = new TextEncoder();

/** By character code: what may stand anywhere in a cell as it is, and what may also begin it. */
const [PLAIN, PLAIN_START] = [/[ !#-+\--~]/, /[0-9A-Za-z]/].map((allowed) =>
  Uint8Array.from({ length: 128 }, (_, code) => (allowed.test(String.fromCharCode(code)) ? 1 : 0)),
);

const float = new Float64Array(1);
const floatWords = new Uint32Array(float.buffer);
/** Which of the two words of a double holds sign and exponent. */
const HIGH_WORD = new Uint8Array(Uint32Array.of(1).buffer)[0] === 1 ? 1 : 0;

const fewCells = new Map<string, Uint8Array>();

/** The latest day asked for, days since 1970-01-01, and its date as `YYYY-MM-DDT`. */
let dateDay = Number.NaN;
let dateBytes: Uint8Array = new Uint8Array(0);

/** Puts bytes that were made before. */
export function putBytes(out: CsvBytes, ready: Uint8Array): void {
  reserve(out, ready.length);
  out.bytes.set(ready, out.length);
  out.length += ready.length;
}

/** `textCell`. */
export function putText(out: CsvBytes, text: string): void {
  reserve(out, text.length);
  const { bytes, length } = out;
  let allowed = PLAIN_START;
  for (let i = 0; i < text.length; i++) {
    const code = text.charCodeAt(i);
    if (allowed[code] !== 1) {
      putEncoded(out, textCell(text));
      return;
    }
    bytes[length + i] = code;
    allowed = PLAIN;
  }
  out.length = length + text.length;
}

/** The same for a text out of few, made once. */
export function putOneOfFew(out: CsvBytes, text: string): void {
  let ready = fewCells.get(text);
  if (ready === undefined) {
    ready = encoder.encode(textCell(text));
    fewCells.set(text, ready);
  }
  putBytes(out, ready);
}

/** A whole number of 0 or more, below 2^53. */
export function putWhole(out: CsvBytes, value: number): void {
  reserve(out, LONGEST_NUMBER);
  out.length = wholeDigits(out.bytes, out.length, value);
}

/** `fixedCell`. */
export function putFixed(out: CsvBytes, value: number | undefined, decimals: 1 | 3 | 4 | 6 | 9): void {
  if (value === undefined || !Number.isFinite(value)) return;
  const unit = POWERS_OF_TEN[LARGEST_POWER + decimals];
  const digits = Math.round(Math.abs(value) * unit);
  if (digits >= LARGEST_EXACT) {
    putEncoded(out, fixedCell(value, decimals));
    return;
  }
  reserve(out, LONGEST_NUMBER);
  const { bytes } = out;
  let at = out.length;
  if (value < 0 && digits !== 0) bytes[at++] = MINUS;
  const whole = Math.floor(digits / unit);
  at = wholeDigits(bytes, at, whole);
  bytes[at++] = POINT;
  out.length = paddedDigits(bytes, at, digits - whole * unit, decimals);
}

/**
 * `exponentCell`.
 *
 * The six digits come from a product with a power of ten; where its errors could change how it rounds, and
 * outside of the usual range, `exponentText` decides.
 */
export function putExponent(out: CsvBytes, value: number | undefined): void {
  if (value === undefined || !Number.isFinite(value)) return;
  if (value === 0) {
    putBytes(out, ZERO_IN_EXPONENT_FORM);
    return;
  }
  float[0] = value;
  // Negative numbers land far outside of the range.
  const twos = (floatWords[HIGH_WORD] >>> 20) - 1023;
  let exponent = Math.floor(twos * LOG10_OF_2);
  if (exponent < 10 - LARGEST_POWER || exponent > LARGEST_POWER - 10) {
    putEncoded(out, exponentText(value, 5));
    return;
  }
  let scaled = value * POWERS_OF_TEN[LARGEST_POWER + 5 - exponent];
  if (scaled >= 1_000_000) {
    exponent++;
    scaled = value * POWERS_OF_TEN[LARGEST_POWER + 5 - exponent];
  }
  let digits = Math.round(scaled);
  if (0.5 - Math.abs(scaled - digits) < ROUNDING_DOUBT) {
    putEncoded(out, exponentText(value, 5));
    return;
  }
  if (digits === 1_000_000) {
    digits = 100_000;
    exponent++;
  }
  reserve(out, LONGEST_NUMBER);
  const { bytes } = out;
  // The last five digits; then the first one and the point take the place of the first one.
  const at = out.length;
  paddedDigits(bytes, at + 1, digits, 6);
  bytes[at] = bytes[at + 1];
  bytes[at + 1] = POINT;
  bytes[at + 7] = EXPONENT;
  bytes[at + 8] = exponent < 0 ? MINUS : PLUS;
  const size = Math.abs(exponent);
  out.length = paddedDigits(bytes, at + 9, size, size < 100 ? 2 : 3);
}

/** `utcCell`. */
export function putUtc(out: CsvBytes, ms: number | undefined): void {
  if (ms === undefined || !Number.isFinite(ms)) return;
  const rounded = Math.round(ms);
  const day = Math.floor(rounded / MS_PER_DAY);
  if (day !== dateDay) {
    dateBytes = encoder.encode(utcCell(day * MS_PER_DAY).slice(0, -'00:00:00.000Z'.length));
    dateDay = day;
  }
  putBytes(out, dateBytes);
  reserve(out, LONGEST_NUMBER);
  const { bytes } = out;
  const msOfDay = rounded - day * MS_PER_DAY;
  const second = Math.floor(msOfDay / 1000);
  const minute = Math.floor(second / 60);
  const hour = Math.floor(minute / 60);
  let at = paddedDigits(bytes, out.length, hour, 2);
  bytes[at++] = COLON;
  at = paddedDigits(bytes, at, minute - 60 * hour, 2);
  bytes[at++] = COLON;
  at = paddedDigits(bytes, at, second - 60 * minute, 2);
  bytes[at++] = POINT;
  at = paddedDigits(bytes, at, msOfDay - 1000 * second, 3);
  bytes[at++] = Z;
  out.length = at;
}

/** What parts two cells. */
export function putComma(out: CsvBytes): void {
  reserve(out, 1);
  out.bytes[out.length++] = COMMA;
}

/** What ends a record. */
export function putRecordEnd(out: CsvBytes): void {
  reserve(out, 2);
  out.bytes[out.length++] = CARRIAGE_RETURN;
  out.bytes[out.length++] = LINE_FEED;
}

/** A finished cell. */
function putEncoded(out: CsvBytes, cell: string): void {
  // UTF-8 takes three bytes at most for each unit of UTF-16.
  reserve(out, 3 * cell.length);
  out.length += encoder.encodeInto(cell, out.bytes.subarray(out.length)).written;
}

function reserve(out: CsvBytes, more: number): void {
  const needed = out.length + more;
  if (needed <= out.bytes.length) return;
  // Threads share it, so that none of the text is copied between them.
  const larger = new Uint8Array(new SharedArrayBuffer(Math.max(needed, 2 * out.bytes.length)));
  larger.set(out.bytes.subarray(0, out.length));
  out.bytes = larger;
}

/** The digits of a whole number from `at` on; returns where they end. */
function wholeDigits(bytes: Uint8Array, at: number, value: number): number {
  if (value >= BILLION) {
    const billions = Math.floor(value / BILLION);
    return paddedDigits(bytes, wholeDigits(bytes, at, billions), value - BILLION * billions, 9);
  }
  let count = 1;
  for (let bound = 10; value >= bound; bound *= 10) count++;
  return paddedDigits(bytes, at, value, count);
}

/** The last `count` digits of a whole number below 10^9, with leading zeros; returns where they end. */
function paddedDigits(bytes: Uint8Array, at: number, value: number, count: number): number {
  let rest = value | 0;
  for (let i = at + count - 1; i >= at; i--) {
    const tens = (rest / 10) | 0;
    bytes[i] = ZERO + rest - 10 * tens;
    rest = tens;
  }
  return at + count;
}
