import { expect, it } from 'vitest';
import { ageDays, expectCurrentFleet, summarizeAges } from '../../src/elements/age.js';
import { InputError } from '../../src/input-error.js';
import { inventedSet } from './formats.js';

const DAY_MS = 86_400_000;
const START_MS = Date.UTC(2031, 2, 31, 12);

function aged(...days: number[]) {
  return days.map((age, i) =>
    inventedSet({ designator: String(99_001 + i), epochMs: START_MS - age * DAY_MS }),
  );
}

it('age is start minus epoch', () => {
  expect(ageDays(aged(1.5)[0], START_MS)).toBe(1.5);
  expect(ageDays(aged(-2)[0], START_MS)).toBe(-2);
});

it('summarizes median, worst and those beyond the limit', () => {
  const sets = aged(3, 1, 30, 45, -2);
  expect(summarizeAges(sets, START_MS)).toEqual({
    count: 5,
    medianDays: 3,
    worstDays: 45,
    worst: sets[3],
    beyondLimit: 1,
    limitDays: 30,
  });
  expect(summarizeAges(aged(1, 2, 4, 100), START_MS, 2)).toMatchObject({ medianDays: 3, beyondLimit: 2 });
});

it('an epoch long after the start is as bad as one long before', () => {
  const sets = aged(10, -60, 50);
  expect(summarizeAges(sets, START_MS)).toMatchObject({ worstDays: -60, worst: sets[1], beyondLimit: 2 });
});

it('of equally bad sets the first is named, and no sets have no ages', () => {
  const sets = aged(7, 9, -9);
  expect(summarizeAges(sets, START_MS)?.worst).toBe(sets[1]);
  expect(summarizeAges([], START_MS)).toBeUndefined();
});

it('refuses a start or a limit that is none', () => {
  expect(() => summarizeAges(aged(1), Number.NaN)).toThrow(RangeError);
  expect(() => summarizeAges(aged(1), START_MS, -1)).toThrow(RangeError);
});

it('stops when most of the fleet is further from the start than the limit', () => {
  expect(() => expectCurrentFleet(aged(400, 401, 402, 1, 2), START_MS)).toThrow(
    new InputError(
      '3 of 5 fleet element sets have their epoch more than 30 days from the start 2031-03-31T12:00:00.000Z (median epoch 2030-02-24T12:00:00.000Z): give --start near that epoch, or newer element sets',
    ),
  );
  expect(() => expectCurrentFleet(aged(-400, -400), START_MS)).toThrow(InputError);
  expect(() => expectCurrentFleet(aged(40, 40, 1), START_MS, 60)).not.toThrow();
});

it('goes on when half of the fleet is current, or there is none', () => {
  expect(() => expectCurrentFleet(aged(400, 400, 1, 30), START_MS)).not.toThrow();
  expect(() => expectCurrentFleet([], START_MS)).not.toThrow();
});
