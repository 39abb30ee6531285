import { expect, it } from 'vitest';
import { dayOfYearToMs, daysInYear, formatUtc, parseUtc } from '../../src/elements/utc.js';

it.each<[string, number]>([
  ['2031-03-02T05:06:07Z', Date.UTC(2031, 2, 2, 5, 6, 7)],
  ['2031-061T05:06:07', Date.UTC(2031, 2, 2, 5, 6, 7)],
  ['2032-366T23:59', Date.UTC(2032, 11, 31, 23, 59)],
  ['2031-03-02', Date.UTC(2031, 2, 2)],
  [' 2031-03-02 05:06:07+00:00 ', Date.UTC(2031, 2, 2, 5, 6, 7)],
  ['2016-12-31T23:59:60Z', Date.UTC(2017, 0, 1)],
])('reads %s', (text, ms) => {
  expect(parseUtc(text)).toBe(ms);
});

it('keeps the whole fraction of a second', () => {
  expect(parseUtc('2031-03-02T00:00:00.000001')).toBeCloseTo(Date.UTC(2031, 2, 2) + 0.001, 3);
  expect(parseUtc('2031-03-02T00:00:00.123456')).toBeCloseTo(Date.UTC(2031, 2, 2) + 123.456, 3);
});

it.each([
  '',
  'tomorrow',
  '2031-02-29T00:00:00',
  '2031-366T00:00:00',
  '2031-000T00:00:00',
  '2031-00-01',
  '2031-13-01',
  '2031-03-32',
  '2031-03-02T24:00:00',
  '2031-03-02T00:60:00',
  '2031-03-02T00:00:61',
  '2031-03-02T00:00:00+01:00',
  '0031-03-02T00:00:00',
  '31-03-02T00:00:00',
])('refuses "%s"', (text) => {
  expect(parseUtc(text)).toBeUndefined();
});

it('writes milliseconds, rounded', () => {
  expect(formatUtc(Date.UTC(2031, 2, 2, 5, 6, 7) + 0.6)).toBe('2031-03-02T05:06:07.001Z');
});

it('day 1.0 is the midnight that starts the year', () => {
  expect(dayOfYearToMs(2031, 1)).toBe(Date.UTC(2031, 0, 1));
  expect(dayOfYearToMs(2032, 366.5)).toBe(Date.UTC(2032, 11, 31, 12));
  expect([2000, 2031, 2032, 2100].map(daysInYear)).toEqual([366, 365, 366, 365]);
});
