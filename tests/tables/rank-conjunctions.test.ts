import { expect, test } from 'vitest';
import { compareDesignators, rankConjunctions } from '../../src/tables/rank-conjunctions.js';
import { seededRandom } from '../synthetic/random.js';
import { EXAMPLE_TCA_MS, exampleConjunction, exampleObject } from './example-conjunction.js';

test('ranks by probability, miss distance, time, designators; rows without a probability last', () => {
  const object = (designator: string) => exampleObject({ designator });
  const wanted = [
    exampleConjunction({ collisionProbability: 1e-3, missDistanceM: 900 }),
    exampleConjunction({ collisionProbability: 1e-4, missDistanceM: 100 }),
    exampleConjunction({ collisionProbability: 1e-4, missDistanceM: 200 }),
    exampleConjunction({ collisionProbability: 1e-4, missDistanceM: 200, tcaMs: EXAMPLE_TCA_MS + 1 }),
    exampleConjunction({
      collisionProbability: 0,
      missDistanceM: 5,
      object1: object('9'),
      object2: object('80'),
    }),
    exampleConjunction({
      collisionProbability: 0,
      missDistanceM: 5,
      object1: object('9'),
      object2: object('700'),
    }),
    exampleConjunction({
      collisionProbability: 0,
      missDistanceM: 5,
      object1: object('10'),
      object2: object('8'),
    }),
    exampleConjunction({ collisionProbability: 0, missDistanceM: 6 }),
    exampleConjunction({ collisionProbability: undefined, missDistanceM: 1 }),
    exampleConjunction({ collisionProbability: Number.NaN, missDistanceM: 2 }),
  ];
  const random = seededRandom(7);
  for (let i = 0; i < 50; i++) {
    const shuffled = wanted
      .map((conjunction) => ({ conjunction, key: random.uniform() }))
      .sort((a, b) => a.key - b.key)
      .map(({ conjunction }) => conjunction);
    const before = [...shuffled];
    expect(rankConjunctions(shuffled)).toEqual(wanted);
    expect(shuffled).toEqual(before);
  }
});

test('orders designators as numbers, others after them', () => {
  expect(['B', '100', '99', 'A', '799999999', '5'].sort(compareDesignators)).toEqual([
    '5',
    '99',
    '100',
    '799999999',
    'A',
    'B',
  ]);
});
