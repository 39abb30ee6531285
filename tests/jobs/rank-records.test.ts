import { expect, test } from 'vitest';
import { rankRecords } from '../../src/jobs/rank-records.js';
import { seededRandom } from '../synthetic/random.js';
import { recordsWith } from './made-records.js';

test('ranks by probability, miss distance, time, designators; encounters without a probability last', () => {
  // Not in the order of the designators, so that an order by index would show.
  const objects = ['10', '700', '9', '8', '80'].map((designator) => ({ designator }));
  const at = (designator: string) => objects.findIndex((object) => object.designator === designator);
  const tcaMs = Date.UTC(2026, 11, 2, 3, 14, 15);
  const same = { first: at('9'), second: at('80'), tcaMs };
  const wanted = [
    { ...same, probability: 1e-3, missKm: 0.9 },
    { ...same, probability: 1e-4, missKm: 0.1 },
    { ...same, probability: 1e-4, missKm: 0.2 },
    { ...same, probability: 1e-4, missKm: 0.2, tcaMs: tcaMs + 1 },
    { ...same, probability: 0, missKm: 0.005, first: at('9'), second: at('80') },
    { ...same, probability: 0, missKm: 0.005, first: at('9'), second: at('700') },
    { ...same, probability: 0, missKm: 0.005, first: at('10'), second: at('8') },
    { ...same, probability: 0, missKm: 0.006 },
    { ...same, probability: Number.NaN, missKm: 0.001 },
    { ...same, probability: Number.NaN, missKm: 0.002 },
  ];
  const random = seededRandom(7);
  for (let i = 0; i < 50; i++) {
    const shuffled = wanted
      .map((encounter) => ({ encounter, key: random.uniform() }))
      .sort((a, b) => a.key - b.key)
      .map(({ encounter }) => encounter);
    const order = rankRecords(recordsWith(shuffled), objects);
    expect(Array.from(order, (number) => shuffled[number])).toEqual(wanted);
  }
});

test('ranks many encounters as a comparison of two at a time does, also where figures all but agree', () => {
  const random = seededRandom(8);
  const objects = Array.from({ length: 9 }, (_, i) => ({ designator: String(90 - 7 * i) }));
  const pick = (choices: readonly number[]) => choices[random.integer(choices.length)];
  const encounters = Array.from({ length: 4000 }, () => ({
    probability: pick([
      Number.NaN,
      0,
      1,
      5e-324,
      1e-5,
      1e-5 * (1 + 2 ** -52),
      1e-5 * (1 - 2 ** -40),
      1e-5 * (1 + 1e-7 * random.uniform()),
      10 ** random.between(-320, 0),
    ]),
    missKm: pick([0, 1, 1 + 2 ** -52, random.uniform()]),
    tcaMs: Date.UTC(2026, 11, 1) + pick([0, 0.125, random.integer(3)]),
    first: random.integer(4),
    second: 4 + random.integer(5),
  }));
  const behind = (probability: number) => (Number.isNaN(probability) ? -1 : probability);
  const wanted = [...encounters].sort(
    (a, b) =>
      behind(b.probability) - behind(a.probability) ||
      a.missKm - b.missKm ||
      a.tcaMs - b.tcaMs ||
      // Designators fall as the indices of objects rise.
      b.first - a.first ||
      b.second - a.second,
  );
  const order = rankRecords(recordsWith(encounters), objects);
  expect(Array.from(order, (number) => encounters[number])).toEqual(wanted);
  expect(rankRecords(recordsWith([]), objects)).toHaveLength(0);
});
