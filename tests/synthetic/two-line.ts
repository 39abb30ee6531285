import type { ElementSet } from '../../src/elements/element-set.js';
import { dayOfYearToMs } from '../../src/elements/utc.js';

const MS_PER_DAY = 86_400_000;
/** Day of year is written with eight decimals. */
const EPOCH_UNITS_PER_DAY = 1e8;
const LARGEST_ALPHA5 = 339_999;
/** Alpha-5: letters without I and O stand for 10 to 33 (space-track.org, "Alpha-5"). */
const ALPHA5_LETTERS = 'ABCDEFGHJKLMNPQRSTUVWXYZ';

/**
 * Writes an element set as the two lines of 69 columns (columns as in CelesTrak's "NORAD Two-Line
 * Element Set Format"), Alpha-5 above 99 999. The derivatives of mean motion, which SGP4 does not use, are
 * written as zero; revolution number and set number are made up.
 */
export function toTwoLine(set: ElementSet): [line1: string, line2: string] {
  const number = alpha5(set.designator);
  const { year, dayText } = epochField(set.epochMs);
  const line1 =
    `1 ${number}U ${compactInternationalDesignator(set.internationalDesignator).padEnd(8)} ` +
    `${String(year % 100).padStart(2, '0')}${dayText}  .00000000  00000-0 ${exponentField(set.bstar)} 0  999`;
  const line2 =
    `2 ${number} ${inclinationField(set.inclinationDeg)} ${angleField(set.rightAscensionDeg)} ` +
    `${eccentricityField(set.eccentricity)} ${angleField(set.argumentOfPerigeeDeg)} ` +
    `${angleField(set.meanAnomalyDeg)} ${fixed(set.meanMotionRevPerDay, 8, 11)}    0`;
  return [line1 + checksum(line1), line2 + checksum(line2)];
}

/** The two lines below a line with the name; the name has at most 24 columns. */
export function toThreeLine(set: ElementSet): [name: string, line1: string, line2: string] {
  if (set.name === '' || set.name.length > 24) {
    throw new RangeError(`${set.designator}: "${set.name}" is no name of 1 to 24 characters`);
  }
  return [set.name, ...toTwoLine(set)];
}

/** The set with every element rounded to what two lines can hold, so that nothing is lost by writing it. */
export function roundToTwoLine(set: ElementSet): ElementSet {
  // Every property by name: copying by spread took most of the time of a large catalog.
  return {
    designator: set.designator,
    name: set.name,
    internationalDesignator: set.internationalDesignator,
    source: set.source,
    epochMs: roundEpochMs(set.epochMs),
    meanMotionRevPerDay: roundTo(set.meanMotionRevPerDay, 1e8),
    eccentricity: roundTo(set.eccentricity, 1e7),
    inclinationDeg: roundTo(set.inclinationDeg, 1e4),
    rightAscensionDeg: roundAngle(set.rightAscensionDeg),
    argumentOfPerigeeDeg: roundAngle(set.argumentOfPerigeeDeg),
    meanAnomalyDeg: roundAngle(set.meanAnomalyDeg),
    bstar: roundExponent(set.bstar),
  };
}

/** Sum of the digits, a minus sign counting 1, modulo 10. */
export function checksum(line: string): string {
  let sum = 0;
  for (const character of line.slice(0, 68)) {
    if (character >= '0' && character <= '9') sum += Number(character);
    else if (character === '-') sum += 1;
  }
  return String(sum % 10);
}

/** `''` becomes zeros: an object that has no number yet. */
function alpha5(designator: string): string {
  const number = Number(designator);
  if (!/^\d*$/.test(designator) || number > LARGEST_ALPHA5) {
    throw new RangeError(`designator ${designator} does not fit into two lines (0 to ${LARGEST_ALPHA5})`);
  }
  if (number <= 99_999) return String(number).padStart(5, '0');
  return ALPHA5_LETTERS[Math.floor(number / 10_000) - 10] + String(number % 10_000).padStart(4, '0');
}

/** `2026-901AB` to `26901AB`. */
function compactInternationalDesignator(text: string): string {
  if (text === '') return '';
  const match = /^\d{2}(\d{2})-(\d{3}[A-Z]{1,3})$/.exec(text);
  if (match === null) throw new RangeError(`international designator ${text} is not YYYY-NNNP`);
  return match[1] + match[2];
}

function epochField(epochMs: number): { year: number; dayText: string } {
  const { year, units } = epochUnits(epochMs);
  const day = Math.floor(units / EPOCH_UNITS_PER_DAY);
  const fraction = units - day * EPOCH_UNITS_PER_DAY;
  return { year, dayText: `${String(day + 1).padStart(3, '0')}.${String(fraction).padStart(8, '0')}` };
}

/** Whole units of 1e-8 day since the start of the year; rounding up past 31 December starts the next year. */
function epochUnits(epochMs: number): { year: number; units: number } {
  const year = new Date(epochMs).getUTCFullYear();
  const sinceYear = (ms: number, ofYear: number) =>
    Math.round(((ms - Date.UTC(ofYear, 0, 1)) / MS_PER_DAY) * EPOCH_UNITS_PER_DAY);
  const units = sinceYear(epochMs, year);
  return units === sinceYear(Date.UTC(year + 1, 0, 1), year) ? { year: year + 1, units: 0 } : { year, units };
}

function roundEpochMs(epochMs: number): number {
  const { year, units } = epochUnits(epochMs);
  return dayOfYearToMs(year, 1 + units / EPOCH_UNITS_PER_DAY);
}

function angleField(degrees: number): string {
  return fixed(roundAngle(degrees), 4, 8);
}

function inclinationField(degrees: number): string {
  if (!(degrees >= 0 && degrees <= 180)) throw new RangeError(`inclination ${degrees} is not in [0, 180]`);
  return fixed(degrees, 4, 8);
}

/** To 1e-4 degrees, in [0, 360). */
function roundAngle(degrees: number): number {
  const rounded = roundTo(((degrees % 360) + 360) % 360, 1e4);
  return rounded === 360 ? 0 : rounded;
}

function eccentricityField(eccentricity: number): string {
  const units = Math.round(eccentricity * 1e7);
  if (!(units >= 0 && units < 1e7)) throw new RangeError(`eccentricity ${eccentricity} is not in [0, 1)`);
  return String(units).padStart(7, '0');
}

/** Five digits behind an assumed decimal point and a power of ten: `-11606-4` is -0.11606e-4. */
function exponentField(value: number): string {
  const { digits, exponent } = exponentParts(value);
  if (exponent > 9) throw new RangeError(`${value} is too large for two lines`);
  const sign = value < 0 && digits !== 0 ? '-' : ' ';
  return `${sign}${String(digits).padStart(5, '0')}${exponent > 0 ? '+' : '-'}${Math.abs(exponent)}`;
}

function roundExponent(value: number): number {
  const { digits, exponent } = exponentParts(value);
  const magnitude = Number(`${digits}e${exponent - 5}`);
  return value < 0 && digits !== 0 ? -magnitude : magnitude;
}

function exponentParts(value: number): { digits: number; exponent: number } {
  if (value === 0) return { digits: 0, exponent: 0 };
  const [mantissa, power] = Math.abs(value).toExponential(4).split('e');
  const digits = Number(mantissa.replace('.', ''));
  const exponent = Number(power) + 1;
  // One digit is all there is for the exponent: smaller values lose leading digits.
  if (exponent >= -9) return { digits, exponent };
  const small = Math.round(Math.abs(value) * 1e14);
  return small === 0 ? { digits: 0, exponent: 0 } : { digits: small, exponent: -9 };
}

function roundTo(value: number, unitsPerOne: number): number {
  return Math.round(value * unitsPerOne) / unitsPerOne;
}

function fixed(value: number, decimals: number, width: number): string {
  const text = value.toFixed(decimals).padStart(width);
  if (text.length !== width) throw new RangeError(`${value} does not fit into ${width} columns`);
  return text;
}
