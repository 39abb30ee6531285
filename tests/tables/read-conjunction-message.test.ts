import { describe, expect, test } from 'vitest';
import { InputError } from '../../src/input-error.js';
import { formatConjunctionMessage } from '../../src/tables/conjunction-message.js';
import { CONJUNCTION_MESSAGE_KEYWORDS } from '../../src/tables/message-keywords.js';
import { readConjunctionMessage } from '../../src/tables/read-conjunction-message.js';
import { norm, subtract } from '../../src/vector.js';
import { exampleConjunction, MESSAGE_RUN } from './example-conjunction.js';

const TEXT = formatConjunctionMessage(exampleConjunction(), MESSAGE_RUN);
const read = (text: string) => readConjunctionMessage(text, 'night.kvn');
/** The message with the first line of `keyword` replaced; throws if there is none. */
function replaced(keyword: string, line: string, text = TEXT): string {
  const pattern = new RegExp(`^${keyword} *= .*$`, 'm');
  if (!pattern.test(text)) throw new Error(`${keyword} is not in the text`);
  return text.replace(pattern, line);
}
const lineOf = (keyword: string) =>
  TEXT.split('\n').findIndex((line) => line.split('=')[0].trim() === keyword) + 1;

describe('a message is read', () => {
  const plain = read(TEXT);

  test('with other line ends, a byte order mark, blank lines and blanks', () => {
    for (const text of [
      TEXT.replaceAll('\n', '\r\n'),
      TEXT.replaceAll('\n', '\r'),
      `\uFEFF\n\n${TEXT}\n\n`,
      TEXT.replaceAll('\n', '  \n   '),
      TEXT.replace(/^(\w+) += /gm, '$1='),
    ])
      expect(read(text)).toEqual(plain);
  });

  test('with or without units, whatever their letters', () => {
    expect(read(TEXT.replace(/ \[[^\]]+\]$/gm, ''))).toMatchObject({
      missDistanceM: plain.missDistanceM,
      object1: { state: plain.object1.state, covarianceRtn: plain.object1.covarianceRtn },
    });
    expect(read(replaced('MISS_DISTANCE', 'MISS_DISTANCE = 715.748[M]')).missDistanceM).toBe(715.748);
  });

  test('without its optional keywords', () => {
    const obligatory = new Set(
      CONJUNCTION_MESSAGE_KEYWORDS.filter((each) => each.obligatory).map((each) => each.name),
    );
    const text = TEXT.split('\n')
      .filter((line) => obligatory.has(line.split('=')[0].trim()))
      .join('\n');
    const message = read(text);
    expect(message.object2).toEqual({ ...plain.object2, other: new Map() });
    expect(message.relativeSpeedMPerS).toBeUndefined();
    expect(message.relativePositionRtnM).toBeUndefined();
    expect(message.collisionProbability).toBeUndefined();
    expect(message.comments).toEqual([]);
  });

  test('with keywords of others, which are kept', () => {
    const text = TEXT.replace(
      /^X /m,
      'MASS = 120 [kg]\nUSER_DEFINED_SHIFT = night [b]\nCDRG_R = 1 [m**3/kg]\nX ',
    );
    const { object1, object2, other } = read(text);
    expect(object1.other.get('MASS')).toBe('120 [kg]');
    expect(object1.other.get('USER_DEFINED_SHIFT')).toBe('night [b]');
    expect(object1.other.get('CDRG_R')).toBe('1 [m**3/kg]');
    expect([...object2.other.keys()]).toEqual(['ORBIT_CENTER']);
    expect(other.get('SCREEN_VOLUME_SHAPE')).toBe('BOX');
    expect(other.has('TCA')).toBe(false);
  });

  test('with a name that holds = and brackets', () => {
    const text = replaced('OBJECT_NAME', 'OBJECT_NAME = A = B [KM]');
    expect(read(text).object1.name).toBe('A = B [KM]');
  });

  test('with a day of the year and microseconds', () => {
    const { tcaMs } = read(replaced('TCA', 'TCA = 2026-336T03:14:15.926500Z'));
    expect(tcaMs).toBe(Date.UTC(2026, 11, 2, 3, 14, 15, 926) + 0.5);
  });

  test('with empty optional keywords', () => {
    expect(
      read(replaced('COLLISION_PROBABILITY', 'COLLISION_PROBABILITY =')).collisionProbability,
    ).toBeUndefined();
  });

  test('in ITRF, the rotation of the Earth added to the velocities', () => {
    const itrf = read(TEXT.replaceAll('EME2000\n', 'ITRF\n'));
    expect(itrf.object1.frame).toBe('ITRF');
    const { positionKm, velocityKmPerS } = plain.object1.state;
    const added = subtract(itrf.object1.state.velocityKmPerS, velocityKmPerS);
    // 465.1 m/s at the equator (6378.137 km): common knowledge of the field.
    const distanceFromAxis = Math.hypot(positionKm[0], positionKm[1]);
    expect(norm(added)).toBeCloseTo((0.4651 * distanceFromAxis) / 6378.137, 4);
    // Eastward: across the radius in the equator plane, no part along the axis.
    expect(positionKm[0] * added[1] - positionKm[1] * added[0]).toBeGreaterThan(0);
    expect(positionKm[0] * added[0] + positionKm[1] * added[1]).toBeCloseTo(0, 6);
    expect(added[2]).toBe(0);
    expect(itrf.object1.state.positionKm).toEqual(positionKm);
  });
});

describe('a message is refused', () => {
  const obligatory = CONJUNCTION_MESSAGE_KEYWORDS.filter((each) => each.obligatory);

  test.each(obligatory.map(({ name, part }) => [name, part]))('without %s', (name, part) => {
    const pattern = new RegExp(`^${name} *= .*\n`, 'm');
    const text = TEXT.replace(pattern, '');
    expect(text).not.toBe(TEXT);
    expect(() => read(text)).toThrow(InputError);
    // Without the line OBJECT = OBJECT1 the next keyword is the one that stands in the wrong part.
    if (name !== 'OBJECT') expect(() => read(text)).toThrow(new RegExp(`night\\.kvn.*\\b${name}\\b`));
    if (part === 'object' && name !== 'OBJECT') expect(() => read(text)).toThrow('OBJECT1');
  });

  test.each([
    ['MISS_DISTANCE', 'MISS_DISTANCE = 0.7 [km]', 'must be [m]'],
    ['MISS_DISTANCE', 'MISS_DISTANCE = -1 [m]', 'not negative'],
    ['MISS_DISTANCE', 'MISS_DISTANCE =', 'no value'],
    ['X', 'X = 2,570.0 [km]', 'not a number'],
    ['X', 'X = NaN [km]', 'not a number'],
    ['X', 'X = 1e999 [km]', 'not a number'],
    ['X', 'X = 0x10 [km]', 'not a number'],
    ['TCA', 'TCA = tomorrow', 'not a time'],
    ['COLLISION_PROBABILITY', 'COLLISION_PROBABILITY = 1.5', 'between 0 and 1'],
    ['COVARIANCE_METHOD', 'COVARIANCE_METHOD = GUESSED', 'CALCULATED or DEFAULT'],
    ['MANEUVERABLE', 'MANEUVERABLE = MAYBE', 'YES or NO or N/A'],
    ['REF_FRAME', 'REF_FRAME = TEME', 'GCRF or EME2000 or ITRF'],
    ['CT_T', 'CT_T = -4 [m**2]', 'not negative'],
    ['CCSDS_CDM_VERS', 'CCSDS_CDM_VERS = 2.0', 'version 1'],
    ['OBJECT', 'OBJECT = OBJECT3', 'OBJECT1 or OBJECT2'],
  ])('for %s: %s', (keyword, line, reason) => {
    const attempt = () => read(replaced(keyword, line));
    expect(attempt).toThrow(InputError);
    expect(attempt).toThrow(reason);
    expect(attempt).toThrow(`night.kvn, line ${lineOf(keyword)}: ${keyword}`);
  });

  test.each([
    ['nothing', '', 'holds no conjunction message'],
    ['XML', '<?xml version="1.0"?>\n<cdm/>', 'give the conjunction message in KVN'],
    ['other text', 'rank,tca_utc\n', 'line 1: "rank,tca_utc" is no line of KEYWORD = value'],
    ['another message', 'CCSDS_OEM_VERS = 2.0\n', 'starts with CCSDS_CDM_VERS'],
    ['two messages', TEXT + TEXT, 'each its own file'],
    ['one object', TEXT.slice(0, TEXT.lastIndexOf('OBJECT  ')), 'OBJECT = OBJECT2 is missing'],
    [
      'one object twice',
      TEXT.replace('= OBJECT2', '= OBJECT1'),
      'OBJECT = OBJECT1 stands here a second time',
    ],
    ['a keyword twice', TEXT.replace(/^TCA .*$/m, '$&\n$&'), 'TCA stands here a second time, first in line'],
    [
      'figures of the encounter among those of an object',
      `${TEXT}RELATIVE_SPEED = 1 [m/s]\n`,
      'move it to the part about the encounter',
    ],
    [
      'figures of an object before any',
      TEXT.replace(/^TCA /m, 'MASS = 1 [kg]\nTCA '),
      'move it to the part about the object',
    ],
    [
      'frames that differ',
      replaced('REF_FRAME', 'REF_FRAME = GCRF'),
      'GCRF for OBJECT1 and EME2000 for OBJECT2',
    ],
    ['an incomplete vector', TEXT.replace(/^RELATIVE_POSITION_T.*\n/m, ''), 'give all three or none'],
    ['no orbit plane', TEXT.replace(/^([XYZ]_DOT) .*$/gm, '$1 = 0 [km/s]'), 'no orbit plane'],
  ])('that holds %s', (_what, text, reason) => {
    expect(() => read(text)).toThrow(InputError);
    expect(() => read(text)).toThrow(reason);
    expect(() => read(text)).toThrow('night.kvn');
  });
});
