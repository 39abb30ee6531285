import { describe, expect, test } from 'vitest';
import {
  checkedValues,
  givenOnCommandLine,
  nearestName,
  type Options,
  optionsHelp,
} from '../../src/cli/options.js';
import { InputError } from '../../src/input-error.js';

const OPTIONS = {
  elements: { kind: 'paths', value: 'FILE', help: 'element sets' },
  days: { kind: 'number', value: 'N', default: 7, above: 0, max: 60, help: 'length' },
  rows: { kind: 'number', value: 'N', integer: true, min: 0, help: 'rows' },
  wide: { kind: 'flag', help: 'wide' },
  start: { kind: 'time', value: 'UTC', help: 'start', defaultInWords: 'now' },
  shape: { kind: 'choice', value: 'SHAPE', choices: ['BOX', 'ELLIPSOID'], help: 'shape' },
  size: { kind: 'half-sizes', value: 'R,T,N', help: 'size' },
  out: {
    kind: 'path',
    value: 'DIR',
    help: 'a folder with a name that takes quite some words to explain to the reader',
  },
} as const satisfies Options;

const read = (parsed: Record<string, unknown>) => checkedValues(OPTIONS, givenOnCommandLine(OPTIONS, parsed));

describe('values', () => {
  test('are read by kind', () => {
    expect(
      read({
        elements: ['a.tle', '-'],
        days: '0.5',
        rows: '20',
        wide: true,
        start: '2026-12-01T00:00:00Z',
        shape: 'BOX',
        size: '0.4, 25,2.5e1',
        out: 'tonight',
      }),
    ).toEqual({
      elements: ['a.tle', '-'],
      days: 0.5,
      rows: 20,
      wide: true,
      start: Date.UTC(2026, 11, 1),
      shape: 'BOX',
      size: [0.4, 25, 25],
      out: 'tonight',
    });
  });

  test('have defaults', () => {
    expect(read({})).toEqual({
      elements: [],
      days: 7,
      rows: undefined,
      wide: false,
      start: undefined,
      shape: undefined,
      size: undefined,
      out: undefined,
    });
  });

  test('of the command line win over those of a file', () => {
    const file = new Map([
      ['days', { value: 3, origin: 'file days' }],
      ['rows', { value: 4, origin: 'file rows' }],
    ]);
    const values = checkedValues(OPTIONS, givenOnCommandLine(OPTIONS, { days: '5' }), file);
    expect([values.days, values.rows]).toEqual([5, 4]);
  });

  test.each([
    [{ days: 'seven' }, '--days is seven, which is not a number'],
    [{ days: '0x10' }, '--days is 0x10, which is not a number'],
    [{ days: 'Infinity' }, '--days is Infinity, which is not a number'],
    [{ days: '1e999' }, '--days is Infinity: it must be a number, above 0, at most 60'],
    [{ days: '0' }, '--days is 0: it must be a number, above 0, at most 60'],
    [{ days: '-3' }, '--days is -3: it must be a number, above 0, at most 60'],
    [{ days: '61' }, '--days is 61: it must be a number, above 0, at most 60'],
    [{ days: '' }, '--days needs a value: --days N'],
    [{ days: ['1', '2'] }, '--days is given 2 times (1, 2): give it once'],
    [{ rows: '1.5' }, '--rows is 1.5: it must be a whole number, at least 0'],
    [{ elements: [] }, '--elements needs a file name, or - for standard input'],
    [{ start: 'tomorrow' }, '--start is tomorrow: it must be a UTC time such as 2026-12-01T00:00:00Z'],
    [{ start: '2026-02-30' }, '--start is 2026-02-30: it must be a UTC time such as 2026-12-01T00:00:00Z'],
    [{ shape: 'box' }, '--shape is box: it must be BOX or ELLIPSOID'],
    [{ size: '1,2' }, '--size is 1,2: it must be three half-sizes R,T,N, each above 0 and at most 1000 km'],
    [
      { size: '1,2,0' },
      '--size is 1,2,0: it must be three half-sizes R,T,N, each above 0 and at most 1000 km',
    ],
    [{ size: '1,2,x' }, '--size is x, which is not a number'],
  ])('are refused with option, value and remedy: %j', (parsed, message) => {
    expect(() => read(parsed)).toThrow(new InputError(message));
  });
});

test('the nearest name is found, and none for nonsense', () => {
  expect(nearestName('mis-km', ['miss-km', 'days'])).toBe('miss-km');
  expect(nearestName('catalogue', ['catalog', 'days'])).toBe('catalog');
  expect(nearestName('zzzzzz', ['miss-km', 'days'])).toBeUndefined();
  expect(nearestName('a', [])).toBeUndefined();
});

test('the help lists options with their defaults and keeps to its width', () => {
  const lines = optionsHelp(OPTIONS, 50).split('\n');
  expect(lines[0]).toBe('  --elements FILE  element sets');
  expect(lines[1]).toBe('  --days N         length (default 7)');
  expect(lines).toContain('  --start UTC      start (default now)');
  expect(Math.max(...lines.map((line) => line.length))).toBeLessThanOrEqual(50);
  expect(lines.join(' ').replace(/\s+/g, ' ')).toContain('quite some words to explain to the reader');
});
