import { parseUtc } from '../elements/utc.js';
import type { OrbitState } from '../ephemeris/state.js';
import { InputError } from '../input-error.js';
import { cross, type Matrix3, norm, type Vector3 } from '../vector.js';
import type { Maneuverable } from './conjunction.js';
import {
  CONJUNCTION_MESSAGE_KEYWORDS,
  COVARIANCE_KEYWORDS,
  type MessageKeyword,
} from './message-keywords.js';

/** Frames that a conjunction message may use. */
type MessageFrame = 'GCRF' | 'EME2000' | 'ITRF';

/** One object of a conjunction message. */
export type ConjunctionMessageObject = {
  readonly designator: string;
  readonly catalogName: string;
  readonly name: string;
  readonly internationalDesignator: string;
  readonly ephemerisName: string;
  readonly covarianceMethod: 'CALCULATED' | 'DEFAULT';
  readonly maneuverable: Maneuverable;
  readonly frame: MessageFrame;
  /**
   * At TCA, km and km/s, the velocity inertial. With `frame` ITRF both vectors are along the axes of ITRF at
   * TCA and the velocity has the Earth's rotation added; distances, relative speed and RTN frames of the two
   * objects are then those of any inertial frame.
   */
  readonly state: OrbitState;
  /** In the object's own RTN frame. */
  readonly positionCovarianceRtnM2: Matrix3;
  /** Six rows over R, T, N and their rates, m and s. */
  readonly covarianceRtn: readonly (readonly number[])[];
  /** All other keywords of the object with their text, units included. */
  readonly other: ReadonlyMap<string, string>;
};

/** A conjunction message as read; times in milliseconds of UTC since 1970-01-01. */
export type ConjunctionMessage = {
  readonly creationMs: number;
  readonly originator: string;
  readonly messageId: string;
  readonly tcaMs: number;
  readonly missDistanceM: number;
  readonly relativeSpeedMPerS: number | undefined;
  /** Object 2 minus object 1 in RTN of object 1. */
  readonly relativePositionRtnM: Vector3 | undefined;
  readonly relativeVelocityRtnMPerS: Vector3 | undefined;
  readonly collisionProbability: number | undefined;
  readonly collisionProbabilityMethod: string | undefined;
  readonly object1: ConjunctionMessageObject;
  readonly object2: ConjunctionMessageObject;
  /** All other keywords about the encounter with their text, units included. */
  readonly other: ReadonlyMap<string, string>;
  readonly comments: readonly string[];
};

const LINE = /^([A-Z][A-Z0-9_]*)\s*=\s*(.*)$/;
const NUMBER = /^[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?$/;
const VALUE_WITH_UNIT = /^(.*?)\s*\[\s*([^\]]*?)\s*\]$/;
const VERSION = /^1\.\d+$/;
/** Rotation of the Earth, rad/s (nominal mean angular velocity, IERS Conventions 2010, table 1.2). */
const EARTH_RATE_RAD_PER_S = 7.292115e-5;
const KEYWORDS = new Map(CONJUNCTION_MESSAGE_KEYWORDS.map((keyword) => [keyword.name, keyword]));

/**
 * Reads a conjunction data message in KVN (CCSDS 508.0-B-1). Keywords that the standard does not know are
 * kept, not judged; a covariance need not be positive definite, that of the standard's own example is not.
 *
 * @param text the content of the file
 * @param file its name, for error messages
 * @throws InputError naming file, line, keyword and value: no message, a keyword missing, twice or in the
 * wrong part, a value or unit that is none, objects in different frames
 */
export function readConjunctionMessage(text: string, file: string): ConjunctionMessage {
  const { message, objects, comments } = partsOf(text, file);
  const version = message.text('CCSDS_CDM_VERS');
  if (!VERSION.test(version))
    throw message.error('CCSDS_CDM_VERS', 'only version 1 (CCSDS 508.0-B-1) is read');
  const [object1, object2] = (['OBJECT1', 'OBJECT2'] as const).map((which) => {
    const part = objects.get(which);
    if (part === undefined)
      throw new InputError(
        `${file}: OBJECT = ${which} is missing: a conjunction message tells of two objects`,
      );
    return objectOf(part);
  });
  if (object1.frame !== object2.frame)
    throw new InputError(
      `${file}: REF_FRAME is ${object1.frame} for OBJECT1 and ${object2.frame} for OBJECT2: ` +
        'write both states in the same frame',
    );
  const missDistanceM = message.number('MISS_DISTANCE');
  if (missDistanceM < 0) throw message.error('MISS_DISTANCE', 'a distance is not negative');
  const collisionProbability = message.optionalNumber('COLLISION_PROBABILITY');
  if (collisionProbability !== undefined && !(collisionProbability >= 0 && collisionProbability <= 1))
    throw message.error('COLLISION_PROBABILITY', 'a probability lies between 0 and 1');
  return {
    creationMs: message.time('CREATION_DATE'),
    originator: message.text('ORIGINATOR'),
    messageId: message.text('MESSAGE_ID'),
    tcaMs: message.time('TCA'),
    missDistanceM,
    relativeSpeedMPerS: message.optionalNumber('RELATIVE_SPEED'),
    relativePositionRtnM: message.optionalVector('RELATIVE_POSITION'),
    relativeVelocityRtnMPerS: message.optionalVector('RELATIVE_VELOCITY'),
    collisionProbability,
    collisionProbabilityMethod: message.optionalText('COLLISION_PROBABILITY_METHOD'),
    object1,
    object2,
    other: message.other(),
    comments,
  };
}

type Entry = { readonly value: string; readonly line: number };

/** One part of a message with readers that remember what they were asked for. */
type Part = {
  readonly text: (name: string) => string;
  readonly optionalText: (name: string) => string | undefined;
  readonly oneOf: <T extends string>(name: string, values: readonly T[]) => T;
  readonly number: (name: string) => number;
  readonly optionalNumber: (name: string) => number | undefined;
  /** Components `_R`, `_T` and `_N` of `name`: all or none. */
  readonly optionalVector: (name: string) => Vector3 | undefined;
  readonly time: (name: string) => number;
  readonly error: (name: string, reason: string) => InputError;
  /** What nothing asked for. */
  readonly other: () => Map<string, string>;
};

function objectOf(part: Part): ConjunctionMessageObject {
  const frame = part.oneOf('REF_FRAME', ['GCRF', 'EME2000', 'ITRF']);
  const positionKm: Vector3 = [part.number('X'), part.number('Y'), part.number('Z')];
  const writtenVelocity: Vector3 = [part.number('X_DOT'), part.number('Y_DOT'), part.number('Z_DOT')];
  const velocityKmPerS = frame === 'ITRF' ? inertialVelocity(positionKm, writtenVelocity) : writtenVelocity;
  if (!(norm(cross(positionKm, velocityKmPerS)) > 0))
    throw part.error('X', 'position and velocity span no orbit plane, so there is no RTN frame');

  const covarianceRtn = Array.from({ length: 6 }, () => [0, 0, 0, 0, 0, 0]);
  for (const { name, row, column } of COVARIANCE_KEYWORDS) {
    const term = part.number(name);
    if (row === column && term < 0) throw part.error(name, 'a variance is not negative');
    covarianceRtn[row][column] = term;
    covarianceRtn[column][row] = term;
  }
  const axis = (row: number): Vector3 => [
    covarianceRtn[row][0],
    covarianceRtn[row][1],
    covarianceRtn[row][2],
  ];
  part.text('OBJECT');
  return {
    designator: part.text('OBJECT_DESIGNATOR'),
    catalogName: part.text('CATALOG_NAME'),
    name: part.text('OBJECT_NAME'),
    internationalDesignator: part.text('INTERNATIONAL_DESIGNATOR'),
    ephemerisName: part.text('EPHEMERIS_NAME'),
    covarianceMethod: part.oneOf('COVARIANCE_METHOD', ['CALCULATED', 'DEFAULT']),
    maneuverable: part.oneOf('MANEUVERABLE', ['YES', 'NO', 'N/A']),
    frame,
    state: { positionKm, velocityKmPerS },
    positionCovarianceRtnM2: [axis(0), axis(1), axis(2)],
    covarianceRtn,
    other: part.other(),
  };
}

function inertialVelocity([x, y]: Vector3, [vx, vy, vz]: Vector3): Vector3 {
  return [vx - EARTH_RATE_RAD_PER_S * y, vy + EARTH_RATE_RAD_PER_S * x, vz];
}

/** Splits the text into the part about the encounter and those of the objects. */
function partsOf(
  text: string,
  file: string,
): { message: Part; objects: ReadonlyMap<string, Part>; comments: readonly string[] } {
  const lines = text.replace(/^\uFEFF/, '').split(/\r\n|\n|\r/);
  if (
    lines
      .find((line) => line.trim() !== '')
      ?.trimStart()
      .startsWith('<')
  )
    throw new InputError(`${file}: looks like XML: give the conjunction message in KVN`);
  const message = new Map<string, Entry>();
  const objects = new Map<string, Map<string, Entry>>();
  const comments: string[] = [];
  let current = message;
  for (const [index, raw] of lines.entries()) {
    const line = raw.trim();
    const at = `${file}, line ${index + 1}`;
    if (line === '') continue;
    if (/^COMMENT(\s|$)/.test(line)) {
      comments.push(line.slice('COMMENT'.length).trim());
      continue;
    }
    const match = LINE.exec(line);
    if (match === null) throw new InputError(`${at}: ${JSON.stringify(line)} is no line of KEYWORD = value`);
    const [, name, value] = match;
    if (message.size === 0 && name !== 'CCSDS_CDM_VERS')
      throw new InputError(`${at}: ${name} comes first: a conjunction message starts with CCSDS_CDM_VERS`);
    if (name === 'OBJECT') {
      if (value !== 'OBJECT1' && value !== 'OBJECT2')
        throw new InputError(`${at}: OBJECT is ${JSON.stringify(value)}: it must be OBJECT1 or OBJECT2`);
      if (objects.has(value)) throw new InputError(`${at}: OBJECT = ${value} stands here a second time`);
      current = new Map();
      objects.set(value, current);
    }
    const keyword = KEYWORDS.get(name);
    if (name === 'CCSDS_CDM_VERS' && message.has(name))
      throw new InputError(`${at}: a second message starts here: give each its own file`);
    if (keyword !== undefined && (keyword.part === 'message') !== (current === message))
      throw new InputError(
        `${at}: ${name} stands ${keyword.part === 'message' ? 'after' : 'before'} the line OBJECT = OBJECT1: ` +
          `move it to the part about ${keyword.part === 'message' ? 'the encounter' : 'the object'}`,
      );
    const earlier = current.get(name);
    if (earlier !== undefined)
      throw new InputError(`${at}: ${name} stands here a second time, first in line ${earlier.line}`);
    current.set(name, { value, line: index + 1 });
  }
  if (message.size === 0) throw new InputError(`${file}: holds no conjunction message`);
  return {
    message: partOf(file, '', message),
    objects: new Map([...objects].map(([which, entries]) => [which, partOf(file, which, entries)])),
    comments,
  };
}

function partOf(file: string, which: string, entries: ReadonlyMap<string, Entry>): Part {
  const asked = new Set<string>();
  const where = which === '' ? '' : ` of ${which}`;
  const entry = (name: string): Entry | undefined => {
    asked.add(name);
    const found = entries.get(name);
    return found === undefined || found.value === '' ? undefined : found;
  };
  const error = (name: string, reason: string): InputError => {
    const found = entries.get(name);
    return new InputError(
      `${file}, line ${found?.line ?? '?'}: ${name}${where} is ${JSON.stringify(found?.value ?? '')}: ${reason}`,
    );
  };
  const obligatory = (name: string): Entry => {
    const found = entry(name);
    if (found !== undefined) return found;
    const empty = entries.get(name);
    throw empty === undefined
      ? new InputError(`${file}: ${name}${where} is missing: a conjunction message must have it`)
      : new InputError(`${file}, line ${empty.line}: ${name}${where} has no value`);
  };
  const toNumber = (name: string, { value }: Entry): number => {
    const { unit } = KEYWORDS.get(name) as MessageKeyword;
    const withUnit = unit === '' ? null : VALUE_WITH_UNIT.exec(value);
    if (withUnit !== null && withUnit[2].toLowerCase() !== unit.toLowerCase())
      throw error(name, `its unit must be [${unit}]`);
    const digits = withUnit === null ? value : withUnit[1];
    const number = NUMBER.test(digits) ? Number(digits) : Number.NaN;
    if (!Number.isFinite(number)) throw error(name, 'not a number');
    return number;
  };
  const optionalNumber = (name: string): number | undefined => {
    const found = entry(name);
    return found === undefined ? undefined : toNumber(name, found);
  };
  return {
    text: (name) => obligatory(name).value,
    optionalText: (name) => entry(name)?.value,
    oneOf: (name, values) => {
      const { value } = obligatory(name);
      const known = values.find((each) => each === value);
      if (known === undefined) throw error(name, `it must be ${values.join(' or ')}`);
      return known;
    },
    number: (name) => toNumber(name, obligatory(name)),
    optionalNumber,
    optionalVector: (name) => {
      const names = ['R', 'T', 'N'].map((axis) => `${name}_${axis}`);
      const [r, t, n] = names.map(optionalNumber);
      if (r === undefined && t === undefined && n === undefined) return undefined;
      if (r === undefined || t === undefined || n === undefined)
        throw new InputError(`${file}: of ${names.join(', ')} some are missing: give all three or none`);
      return [r, t, n];
    },
    time: (name) => {
      const ms = parseUtc(obligatory(name).value);
      if (ms === undefined) throw error(name, 'not a time such as 2026-12-02T03:14:15.926');
      return ms;
    },
    error,
    other: () =>
      new Map([...entries].filter(([name]) => !asked.has(name)).map(([name, { value }]) => [name, value])),
  };
}
