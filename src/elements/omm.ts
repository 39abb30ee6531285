import { parseCatalogNumber } from './catalog-number.js';
import type { ReadOptions, SetOrRejection } from './decoder.js';
import type { ElementSet, ElementSource } from './element-set.js';
import { cleanName } from './object-name.js';
import { quoted, Rejection } from './rejection.js';
import { parseUtc } from './utc.js';
import { verifyElements } from './verify.js';

/** A value as a format gives it: text, a JSON value, and the unit where one is written beside it. */
export type OmmValue = { readonly value: unknown; readonly unit?: string };

/** Keyword to value, of one message. */
export type OmmFields = ReadonlyMap<string, OmmValue>;

/** Keywords that tell a table or an object of orbit mean elements from any other. */
export const OMM_KEYWORDS: ReadonlySet<string> = new Set([
  'ARG_OF_PERICENTER',
  'BSTAR',
  'CENTER_NAME',
  'CLASSIFICATION_TYPE',
  'ECCENTRICITY',
  'ELEMENT_SET_NO',
  'EPHEMERIS_TYPE',
  'EPOCH',
  'INCLINATION',
  'MEAN_ANOMALY',
  'MEAN_ELEMENT_THEORY',
  'MEAN_MOTION',
  'MEAN_MOTION_DDOT',
  'MEAN_MOTION_DOT',
  'NORAD_CAT_ID',
  'OBJECT_ID',
  'OBJECT_NAME',
  'RA_OF_ASC_NODE',
  'REF_FRAME',
  'REV_AT_EPOCH',
  'TIME_SYSTEM',
]);

const NUMBER = /^[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?$/;
const TIME_OF_DAY = /[T ]\d\d:\d\d:\d\d/;
const INTERNATIONAL_DESIGNATOR = /^\d{4}-\d{3}[A-Z]{1,3}$/;
const MESSAGE_VERSION = /^CCSDS_([A-Z]+)_VERS$/;
const LARGEST_CATALOG_NUMBER = 999_999_999;

/**
 * Reads one orbit mean-elements message (CCSDS 502.0-B-3, section 4), verified like any element set.
 *
 * Taken are only the elements that this SGP4 can use: theory SGP4 (`SGP4` or `SGP/SGP4`), mean motion in
 * revolutions a day, B*, time system UTC, frame TEME, center EARTH. `SEMI_MAJOR_AXIS` and `BTERM` belong to
 * other theories and are rejected, as is any ephemeris type but 0. The object is named by `NORAD_CAT_ID`;
 * `OBJECT_ID` cannot stand in for it, because it would not match the same object in a two-line set. JSON and
 * CSV, which no standard defines, may leave out theory, time system, frame and center (common practice).
 *
 * @param demandAll theory, time system, frame and center are obligatory, as in KVN and XML
 */
export function readOmm(
  fields: OmmFields,
  source: ElementSource,
  demandAll: boolean,
  options: ReadOptions,
): SetOrRejection {
  try {
    return parseOmm(fields, source, demandAll, options);
  } catch (error) {
    if (!(error instanceof Rejection)) throw error;
    return rejectedOmm(fields, source, error.message);
  }
}

/** A rejected record that names the object if it can. */
export function rejectedOmm(fields: OmmFields, source: ElementSource, detail: string): SetOrRejection {
  let designator = '';
  try {
    designator = catalogNumber(fields, true);
  } catch (error) {
    if (!(error instanceof Rejection)) throw error;
  }
  return { source, designator, reason: 'rejected', detail };
}

function parseOmm(
  fields: OmmFields,
  source: ElementSource,
  demandAll: boolean,
  { batch = false }: ReadOptions,
): ElementSet {
  expectOmm(fields);
  const designator = catalogNumber(fields, batch);
  const theory = optionalText(fields, 'MEAN_ELEMENT_THEORY');
  if (theory?.toUpperCase() === 'SGP4-XP') {
    throw new Rejection('MEAN_ELEMENT_THEORY SGP4-XP is another theory than SGP4, and not supported');
  }
  expectSettled(fields, 'MEAN_ELEMENT_THEORY', ['SGP4', 'SGP/SGP4'], demandAll);
  expectSettled(fields, 'TIME_SYSTEM', ['UTC'], demandAll);
  expectSettled(fields, 'REF_FRAME', ['TEME'], demandAll);
  expectSettled(fields, 'CENTER_NAME', ['EARTH'], demandAll);
  expectEphemerisType(fields);
  if (has(fields, 'BTERM')) throw new Rejection('BTERM belongs to SGP4-XP, expected BSTAR');
  if (!has(fields, 'MEAN_MOTION') && has(fields, 'SEMI_MAJOR_AXIS')) {
    throw new Rejection('SEMI_MAJOR_AXIS instead of MEAN_MOTION: elements for SGP4 come with MEAN_MOTION');
  }
  const internationalDesignator = optionalText(fields, 'OBJECT_ID') ?? '';
  const set: ElementSet = {
    designator,
    name: cleanName(optionalText(fields, 'OBJECT_NAME') ?? ''),
    internationalDesignator: INTERNATIONAL_DESIGNATOR.test(internationalDesignator)
      ? internationalDesignator
      : '',
    epochMs: epoch(fields),
    meanMotionRevPerDay: number(fields, 'MEAN_MOTION', 'rev/day'),
    eccentricity: number(fields, 'ECCENTRICITY'),
    inclinationDeg: number(fields, 'INCLINATION', 'deg'),
    rightAscensionDeg: number(fields, 'RA_OF_ASC_NODE', 'deg'),
    argumentOfPerigeeDeg: number(fields, 'ARG_OF_PERICENTER', 'deg'),
    meanAnomalyDeg: number(fields, 'MEAN_ANOMALY', 'deg'),
    bstar: number(fields, 'BSTAR', '1/ER'),
    source,
  };
  verifyElements(set);
  return set;
}

function expectOmm(fields: OmmFields): void {
  for (const keyword of fields.keys()) {
    const kind = MESSAGE_VERSION.exec(keyword)?.[1];
    if (kind !== undefined && kind !== 'OMM') {
      throw new Rejection(`this is a CCSDS ${kind} message, expected orbit mean elements (OMM)`);
    }
  }
}

function has(fields: OmmFields, keyword: string): boolean {
  const value = fields.get(keyword)?.value;
  return value !== undefined && value !== null && !(typeof value === 'string' && value.trim() === '');
}

function optionalText(fields: OmmFields, keyword: string): string | undefined {
  if (!has(fields, keyword)) return undefined;
  const value = fields.get(keyword)?.value;
  if (typeof value === 'string') return value.trim();
  if (typeof value === 'number') return String(value);
  throw new Rejection(`${keyword} is ${quoted(value)}, expected text`);
}

function text(fields: OmmFields, keyword: string): string {
  const value = optionalText(fields, keyword);
  if (value === undefined) throw new Rejection(`${keyword} is missing`);
  return value;
}

function expectSettled(
  fields: OmmFields,
  keyword: string,
  accepted: readonly string[],
  demandAll: boolean,
): void {
  const value = demandAll ? text(fields, keyword) : optionalText(fields, keyword);
  if (value !== undefined && !accepted.includes(value.toUpperCase())) {
    throw new Rejection(`${keyword} is ${quoted(value)}, expected ${accepted.join(' or ')}`);
  }
}

function expectEphemerisType(fields: OmmFields): void {
  const type = optionalText(fields, 'EPHEMERIS_TYPE');
  if (type === undefined || /^0+$/.test(type)) return;
  const meaning = type === '4' ? ' (SGP4-XP)' : '';
  throw new Rejection(`EPHEMERIS_TYPE is ${quoted(type)}${meaning}, expected 0 (SGP4)`);
}

function catalogNumber(fields: OmmFields, batch: boolean): string {
  const written = optionalText(fields, 'NORAD_CAT_ID');
  if (written === undefined) {
    if (batch) return '';
    throw new Rejection('NORAD_CAT_ID is missing');
  }
  const number = parseCatalogNumber(written);
  if (number === '0' && batch) return '';
  if (number === undefined || number === '0') {
    throw new Rejection(`NORAD_CAT_ID is ${quoted(written)}, expected 1 to ${LARGEST_CATALOG_NUMBER}`);
  }
  return number;
}

function epoch(fields: OmmFields): number {
  const written = text(fields, 'EPOCH');
  const epochMs = TIME_OF_DAY.test(written) ? parseUtc(written) : undefined;
  if (epochMs === undefined) {
    throw new Rejection(
      `EPOCH is ${quoted(written)}, expected a UTC time such as 2026-01-31T12:00:00.123456 or 2026-031T12:00:00.123456`,
    );
  }
  return epochMs;
}

function number(fields: OmmFields, keyword: string, unit?: string): number {
  const written = text(fields, keyword);
  const value = NUMBER.test(written) ? Number(written) : Number.NaN;
  if (!Number.isFinite(value)) throw new Rejection(`${keyword} is ${quoted(written)}, expected a number`);
  const writtenUnit = fields.get(keyword)?.unit;
  if (writtenUnit !== undefined && writtenUnit.toLowerCase() !== unit?.toLowerCase()) {
    throw new Rejection(`${keyword} is in ${quoted(writtenUnit)}, expected ${unit ?? 'no unit'}`);
  }
  return value;
}
