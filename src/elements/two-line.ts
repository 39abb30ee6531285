import { parseCatalogNumber } from './catalog-number.js';
import type { Decoder, ReadOptions, SetOrRejection } from './decoder.js';
import type { ElementSet, UnusedElements } from './element-set.js';
import { lineSplitter } from './lines.js';
import { cleanName } from './object-name.js';
import { quoted, Rejection } from './rejection.js';
import { type LineGroup, lineGrouper, type SetLines } from './two-line-groups.js';
import { dayOfYearToMs, daysInYear } from './utc.js';
import { verifyElements } from './verify.js';

const LINE_LENGTH = 69;
const MS_PER_DAY = 86_400_000;
/** Two-digit years from here on are of the 20th century (the first satellite flew in 1957). */
const FIRST_YEAR = 57;

const DECIMAL = /^ *[+-]?(?:\d+\.\d*|\.\d+) *$/;
const DECIMAL_OR_BLANK = /^ *$|^ *[+-]?(?:\d+\.\d*|\.\d+) *$/;
const DAY_OF_YEAR = /^ *(\d{1,3})(\.\d*) *$/;
const TWO_DIGITS = /^[ \d]\d$/;
const DIGITS = /^ *\d+$/;
const DIGITS_OR_BLANK = /^[ \d]*$/;
const EXPONENTIAL = /^([ +-])([ \d]{4}\d)([ +-])(\d)$/;
const EXPONENTIAL_OR_BLANK = /^ *$|^[ +-][ \d]{4}\d[ +-]\d$/;
const INTERNATIONAL_DESIGNATOR = /^(\d\d)(\d{3})([A-Z]{1,3})$/;

/** One of the two lines, without leading blanks and whatever stands after column 69. */
type ElementLine = { readonly number: 1 | 2; readonly text: string };

/** Decoder of two-line and three-line sets, mixed as they come. */
export function twoLineDecoder(file: string, options: ReadOptions): Decoder {
  const splitter = lineSplitter();
  const grouper = lineGrouper();
  const decode = (group: LineGroup) => decodeGroup(group, file, options);
  return {
    push: (chunk) => grouper.push(splitter.push(chunk)).map(decode),
    end: () => [...grouper.push(splitter.end()), ...grouper.end()].map(decode),
  };
}

/**
 * The checksum of an element line: its digits added up, each minus as 1, all else (plus signs, letters,
 * points, blanks) as 0, modulo 10.
 *
 * @param text the line; only columns 1 to 68 count
 */
export function elementLineChecksum(text: string): number {
  let sum = 0;
  for (let i = 0; i < LINE_LENGTH - 1 && i < text.length; i++) {
    const code = text.charCodeAt(i);
    if (code >= 48 && code <= 57) sum += code - 48;
    else if (code === 45) sum += 1;
  }
  return sum % 10;
}

function decodeGroup(group: LineGroup, file: string, options: ReadOptions): SetOrRejection {
  if (group.kind === 'stray') {
    return {
      source: { file, line: group.first, text: group.text },
      designator: group.element === undefined ? '' : designatorOf(group.element.text),
      reason: 'rejected',
      detail: group.element === undefined ? `${quoted(group.text)}: ${group.detail}` : group.detail,
    };
  }
  try {
    return parseSet(group, file, options);
  } catch (error) {
    if (!(error instanceof Rejection)) throw error;
    return rejected(group, file, error.message);
  }
}

function rejected(lines: SetLines, file: string, detail: string): UnusedElements {
  return {
    source: sourceOf(lines, file),
    designator: designatorOf(lines.one.text),
    reason: 'rejected',
    detail,
  };
}

function sourceOf({ name, one, two }: SetLines, file: string): ElementSet['source'] {
  if (name === undefined) return { file, line: one.number, text: `${one.text}\n${two.text}` };
  return { file, line: name.number, text: `${name.text}\n${one.text}\n${two.text}` };
}

/** The object a damaged line speaks of, as far as it can be read. */
function designatorOf(text: string): string {
  const number = parseCatalogNumber(text.trimStart().slice(2, 7).trimStart());
  return number === undefined || number === '0' ? '' : number;
}

function parseSet(lines: SetLines, file: string, { batch = false }: ReadOptions): ElementSet {
  const one = elementLine(lines.one.text, 1);
  const two = elementLine(lines.two.text, 2);
  expectBlanks(one, [2, 9, 18, 33, 44, 53, 62, 64]);
  expectBlanks(two, [2, 8, 17, 26, 34, 43, 52]);
  const designator = catalogNumber(one, batch);
  if (catalogNumber(two, batch) !== designator) {
    throw new Rejection(
      `line 1 is of catalog number ${quoted(columns(one, 3, 7))}, line 2 of ${quoted(columns(two, 3, 7))}, expected the same on both`,
    );
  }
  checked(one, 34, 43, 'first derivative of mean motion', DECIMAL_OR_BLANK, 'a decimal number');
  checked(
    one,
    45,
    52,
    'second derivative of mean motion',
    EXPONENTIAL_OR_BLANK,
    'a number such as " 12345-3"',
  );
  const type = columns(one, 63, 63);
  if (type === '4') throw new Rejection('line 1, column 63: ephemeris type 4 is SGP4-XP, expected 0 (SGP4)');
  checked(one, 63, 63, 'ephemeris type', /^[ 0]$/, '0 (SGP4) or blank');
  checked(one, 65, 68, 'element set number', DIGITS_OR_BLANK, 'digits');
  checked(two, 64, 68, 'revolution number', DIGITS_OR_BLANK, 'digits');
  const set: ElementSet = {
    designator,
    name: lines.name === undefined ? '' : cleanName(lines.name.text.trimStart().replace(/^0(?: |$)/, '')),
    internationalDesignator: internationalDesignator(columns(one, 10, 17)),
    epochMs: epoch(one),
    meanMotionRevPerDay: decimal(two, 53, 63, 'mean motion'),
    eccentricity: Number(`0.${zeroPadded(checked(two, 27, 33, 'eccentricity', DIGITS, 'seven digits'))}`),
    inclinationDeg: decimal(two, 9, 16, 'inclination'),
    rightAscensionDeg: decimal(two, 18, 25, 'right ascension of the ascending node'),
    argumentOfPerigeeDeg: decimal(two, 35, 42, 'argument of perigee'),
    meanAnomalyDeg: decimal(two, 44, 51, 'mean anomaly'),
    bstar: exponential(one, 54, 61, 'B*'),
    source: sourceOf(lines, file),
  };
  verifyElements(set);
  return set;
}

function elementLine(raw: string, number: 1 | 2): ElementLine {
  const text = raw.trim();
  const checksum = elementLineChecksum(text);
  if (text.length === LINE_LENGTH - 1) {
    throw new Rejection(`line ${number} has no checksum in column 69, expected ${checksum}`);
  }
  if (text.length < LINE_LENGTH) {
    throw new Rejection(`line ${number} has ${text.length} characters, expected ${LINE_LENGTH}`);
  }
  const written = text[LINE_LENGTH - 1];
  if (written !== String(checksum)) {
    throw new Rejection(`line ${number}, column 69: checksum ${quoted(written)}, expected ${checksum}`);
  }
  if (text.length > LINE_LENGTH && !/\s/.test(text[LINE_LENGTH])) {
    throw new Rejection(
      `line ${number}, column 70: ${quoted(text[LINE_LENGTH])}, expected the end or a blank`,
    );
  }
  return { number, text: text.slice(0, LINE_LENGTH) };
}

function expectBlanks(line: ElementLine, blankColumns: readonly number[]): void {
  for (const column of blankColumns) {
    const character = line.text[column - 1];
    if (character !== ' ') {
      throw new Rejection(`line ${line.number}, column ${column}: ${quoted(character)}, expected a blank`);
    }
  }
}

/** Columns as the format counts them: from 1, both ends included. */
function columns(line: ElementLine, first: number, last: number): string {
  return line.text.slice(first - 1, last);
}

function checked(
  line: ElementLine,
  first: number,
  last: number,
  name: string,
  pattern: RegExp,
  expected: string,
): string {
  const text = columns(line, first, last);
  if (pattern.test(text)) return text;
  const place = first === last ? `column ${first}` : `columns ${first}-${last}`;
  throw new Rejection(`line ${line.number}, ${place}: ${name} ${quoted(text)}, expected ${expected}`);
}

function decimal(line: ElementLine, first: number, last: number, name: string): number {
  return Number(checked(line, first, last, name, DECIMAL, 'a decimal number'));
}

/** A number with its decimal point assumed before the first digit, and a one-digit power of ten. */
function exponential(line: ElementLine, first: number, last: number, name: string): number {
  const text = checked(line, first, last, name, EXPONENTIAL, 'a number such as " 12345-3"');
  const sign = text[0] === '-' ? '-' : '';
  const exponentSign = text[6] === '-' ? '-' : '';
  return Number(`${sign}0.${zeroPadded(text.slice(1, 6))}e${exponentSign}${text[7]}`);
}

function zeroPadded(text: string): string {
  return text.replaceAll(' ', '0');
}

function catalogNumber(line: ElementLine, batch: boolean): string {
  const text = columns(line, 3, 7);
  const number = parseCatalogNumber(text.trimStart());
  if (batch && (text.trim() === '' || number === '0')) return '';
  if (number === undefined || number === '0') {
    throw new Rejection(
      `line ${line.number}, columns 3-7: catalog number ${quoted(text)}, expected 1 to 99999 or Alpha-5`,
    );
  }
  return number;
}

function epoch(line: ElementLine): number {
  const yearOfCentury = Number(checked(line, 19, 20, 'epoch year', TWO_DIGITS, 'two digits'));
  const year = yearOfCentury < FIRST_YEAR ? 2000 + yearOfCentury : 1900 + yearOfCentury;
  const text = checked(line, 21, 32, 'epoch day', DAY_OF_YEAR, 'a day of the year with its fraction');
  const match = DAY_OF_YEAR.exec(text);
  const day = Number(match?.[1]);
  if (day < 1 || day > daysInYear(year)) {
    throw new Rejection(
      `line 1, columns 21-32: epoch day ${quoted(text)}, expected 1 to less than ${daysInYear(year) + 1} in ${year}`,
    );
  }
  // Whole day and fraction apart: their sum in days would lose some of the last digit.
  return dayOfYearToMs(year, day) + Number(`0${match?.[2]}`) * MS_PER_DAY;
}

function internationalDesignator(text: string): string {
  const match = INTERNATIONAL_DESIGNATOR.exec(text.trim());
  if (match === null) return '';
  return `${Number(match[1]) < FIRST_YEAR ? '20' : '19'}${match[1]}-${match[2]}${match[3]}`;
}
