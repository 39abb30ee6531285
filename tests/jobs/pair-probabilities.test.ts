import { describe, expect, it } from 'vitest';
import { FIELD, FIELDS } from '../../src/jobs/encounter-records.js';
import { fillPairProbabilities } from '../../src/jobs/pair-probabilities.js';
import { seededRandom } from '../synthetic/random.js';
import { recordsWith } from './made-records.js';

type Met = readonly [first: number, second: number, probability: number];

/** The total of the pair in each record, in their order. */
function totals(met: readonly Met[], objectCount = 10, identities?: readonly number[]): number[] {
  const records = recordsWith(met.map(([first, second, probability]) => ({ first, second, probability })));
  fillPairProbabilities(records, objectCount, identities);
  return met.map((_, k) => records.data[FIELDS * k + FIELD.pairProbability]);
}

/** The total of one pair with these probabilities. */
function totalOf(probabilities: readonly number[]): number {
  const all = totals(probabilities.map((probability) => [3, 7, probability]));
  expect(new Set(all).size).toBe(1);
  return all[0];
}

describe('the total of a pair', () => {
  it('is the complement of no collision at all', () => {
    expect(totalOf([0.5, 0.5])).toBeCloseTo(0.75, 15);
    expect(totalOf([0.1, 0.2, 0.3])).toBeCloseTo(1 - 0.9 * 0.8 * 0.7, 15);
    expect(totalOf([0.25])).toBe(0.25);
    expect(totalOf([1, 0.2])).toBe(1);
    expect(totalOf([0, 0])).toBe(0);
  });

  it('keeps its digits where 1 - p would lose them', () => {
    expect(totalOf([1e-20, 2e-20]) / 3e-20).toBeCloseTo(1, 14);
    expect(totalOf([1e-9, 1e-9]) / (2e-9 - 1e-18)).toBeCloseTo(1, 14);
    expect(totalOf([1e-300])).toBe(1e-300);
  });

  it('takes encounters without a figure as nothing, and has none where all lack it', () => {
    expect(totalOf([Number.NaN, 0.25])).toBe(0.25);
    expect(totalOf([Number.NaN, Number.NaN])).toBeNaN();
  });

  it('keeps pairs apart, whichever of their indices they share', () => {
    expect(
      totals([
        [0, 9, 0.5],
        [1, 0, 0.25],
        [9, 0, 0.125],
        [0, 9, 0.5],
      ]),
    ).toEqual([0.75, 0.25, 0.125, 0.75]);
  });

  it('joins what stands for one object in turn', () => {
    const met: readonly Met[] = [
      [0, 2, 0.5],
      [1, 2, 0.5],
    ];
    expect(totals(met, 3)).toEqual([0.5, 0.5]);
    expect(totals(met, 3, [0, 0, 2])).toEqual([0.75, 0.75]);
  });

  it('is that of its own encounters among very many pairs', () => {
    const random = seededRandom(9);
    const met = Array.from(
      { length: 20_000 },
      (): Met => [random.integer(150), 100_000 + random.integer(150), 10 ** random.between(-9, 0)],
    );
    const none = new Map<string, number>();
    const nameOf = ([first, second]: Met) => `${first} ${second}`;
    for (const each of met) none.set(nameOf(each), (none.get(nameOf(each)) ?? 1) * (1 - each[2]));
    const found = totals(met, 100_200);
    const worst = met.map((each, k) => Math.abs(found[k] - (1 - none.get(nameOf(each))!)));
    expect(Math.max(...worst)).toBeLessThan(1e-14);
    expect(totals([])).toEqual([]);
  });
});
