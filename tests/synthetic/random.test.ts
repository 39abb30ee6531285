import { expect, test } from 'vitest';
import { seededRandom, splitMix64, xoshiro128StarStar } from './random.js';

test('SplitMix64 gives the published stream for seed 1234567', () => {
  // Rosetta Code, "Pseudo-random numbers/Splitmix64" (from memory).
  const next = splitMix64(1234567n);
  expect(Array.from({ length: 5 }, next)).toEqual([
    6457827717110365317n,
    3203168211198807973n,
    9817491932198370423n,
    4593380528125082431n,
    16408922859458223821n,
  ]);
});

test('xoshiro128** gives the stream worked out by hand from its definition', () => {
  // State 1, 2, 3, 4: first output rotl(2 * 5, 7) * 9; then, step by step, as the test vector that ships with the
  // rand_xoshiro crate (from memory).
  const next = xoshiro128StarStar([1, 2, 3, 4]);
  expect(Array.from({ length: 4 }, next)).toEqual([11520, 0, 5927040, 70819200]);
});

test('normal and uniform draws have the moments they claim', () => {
  const random = seededRandom(7);
  const count = 200_000;
  let sum = 0;
  let squares = 0;
  let fourths = 0;
  let uniformSum = 0;
  for (let index = 0; index < count; index += 1) {
    const x = random.normal(3, 2);
    sum += x;
    squares += (x - 3) ** 2;
    fourths += (x - 3) ** 4;
    uniformSum += random.uniform();
  }
  expect(sum / count).toBeCloseTo(3, 1);
  expect(squares / count / 4).toBeCloseTo(1, 1);
  expect(fourths / count / 48).toBeCloseTo(1, 1);
  expect(uniformSum / count).toBeCloseTo(0.5, 2);
});

test('weights set how often each item is drawn', () => {
  const random = seededRandom(8);
  const items = [
    { name: 'a', weight: 3 },
    { name: 'b', weight: 1 },
  ];
  let hits = 0;
  for (let index = 0; index < 40_000; index += 1) if (random.weighted(items).name === 'a') hits += 1;
  expect(hits / 40_000).toBeCloseTo(0.75, 1);
});

test('the same seed gives the same stream, another seed another one', () => {
  const draws = (seed: number) => Array.from({ length: 8 }, seededRandom(seed).bits);
  expect(draws(5)).toEqual(draws(5));
  expect(draws(5)).not.toEqual(draws(6));
  expect(() => seededRandom(-1)).toThrow('seed -1');
});
