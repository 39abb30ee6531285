import { sgp4 } from 'satellite.js';
import { expect, test } from 'vitest';
import { sgp4RecordOf } from '../../src/elements/sgp4-record.js';
import {
  apogeeHeightKm,
  perigeeHeightKm,
  semiMajorAxisKm,
  sunSynchronousInclinationDeg,
  syntheticCatalog,
  walkerShell,
} from './catalog.js';

const START_MS = Date.UTC(2026, 11, 1);
const SETS = syntheticCatalog({ seed: 11, count: 8000, epochMs: START_MS });

test('every set initializes and propagates at its epoch', () => {
  for (const set of SETS) {
    const record = sgp4RecordOf(set);
    expect(record.error, set.designator).toBe(0);
    expect(sgp4(record, 0), set.designator).not.toBeNull();
  }
});

test('shares of low, eccentric, medium, geosynchronous and very low orbits are those of a catalog', () => {
  const share = (holds: (perigeeKm: number, apogeeKm: number) => boolean) =>
    SETS.filter((set) => holds(perigeeHeightKm(set), apogeeHeightKm(set))).length / SETS.length;
  // Common practice: three quarters to four fifths of a public catalog fly low.
  expect(share((_, apogee) => apogee < 2000)).toBeGreaterThan(0.74);
  expect(share((_, apogee) => apogee < 2000)).toBeLessThan(0.83);
  expect(share((perigee, apogee) => perigee < 4000 && apogee > 2000)).toBeCloseTo(0.105, 1);
  expect(share((perigee) => perigee > 18_000 && perigee < 25_000)).toBeCloseTo(0.035, 1);
  expect(share((perigee) => perigee > 34_000)).toBeCloseTo(0.065, 1);
  expect(share((perigee) => perigee < 250)).toBeGreaterThan(0.01);
});

test('low orbits crowd in shells and inclinations', () => {
  const low = SETS.filter((set) => apogeeHeightKm(set) < 2000 && perigeeHeightKm(set) > 255);
  const meanHeight = (index: number) => semiMajorAxisKm(low[index].meanMotionRevPerDay) - 6378.135;
  const between = (from: number, to: number) =>
    low.filter((_, index) => meanHeight(index) >= from && meanHeight(index) < to).length / low.length;
  expect(between(480, 600)).toBeGreaterThan(0.25);
  expect(between(700, 900)).toBeGreaterThan(0.2);
  expect(between(1000, 1500)).toBeGreaterThan(0.08);
  const at = (degrees: number, within: number) =>
    low.filter((set) => Math.abs(set.inclinationDeg - degrees) < within).length / low.length;
  for (const [degrees, within] of [
    [53, 0.5],
    [74, 0.5],
    [82.9, 0.5],
    [86.4, 0.5],
    [98, 1.2],
  ]) {
    expect(at(degrees, within), `${degrees} deg`).toBeGreaterThan(0.03);
  }
});

test('epochs lie in the five days before the start, most of them in the last', () => {
  const ages = SETS.map((set) => (START_MS - set.epochMs) / 86_400_000);
  expect(Math.min(...ages)).toBeGreaterThan(-1e-6);
  expect(Math.max(...ages)).toBeGreaterThan(4.9);
  expect(Math.max(...ages)).toBeLessThan(5.000001);
  expect(ages.filter((age) => age < 1).length / ages.length).toBeGreaterThan(0.5);
});

test('there are trains a few kilometers apart and pairs with the same elements', () => {
  let same = 0;
  let trailing = 0;
  for (let index = 1; index < SETS.length; index += 1) {
    const before = SETS[index - 1];
    const set = SETS[index];
    if (before.rightAscensionDeg !== set.rightAscensionDeg || before.epochMs !== set.epochMs) continue;
    if (before.meanAnomalyDeg === set.meanAnomalyDeg) same += 1;
    else trailing += 1;
  }
  expect(same).toBeGreaterThan(3);
  expect(trailing / SETS.length).toBeGreaterThan(0.02);
});

test('the mix can be chosen and the same seed gives the same sets', () => {
  const mix = { low: 0, eccentric: 0, medium: 1, geosynchronous: 0, decaying: 0, train: 0 };
  const sets = syntheticCatalog({ seed: 1, count: 50, epochMs: START_MS, mix, firstDesignator: 330_000 });
  expect(sets.every((set) => perigeeHeightKm(set) > 18_000)).toBe(true);
  expect(sets.map((set) => set.designator)).toEqual(sets.map((_, index) => String(330_000 + index)));
  expect(syntheticCatalog({ seed: 11, count: 500, epochMs: START_MS })).toEqual(SETS.slice(0, 500));
});

test('100 000 objects take seconds at most', () => {
  const beganMs = performance.now();
  expect(syntheticCatalog({ seed: 2, count: 100_000, epochMs: START_MS }).length).toBe(100_000);
  expect(performance.now() - beganMs).toBeLessThan(10_000);
});

test('a Walker shell spreads planes and satellites evenly', () => {
  // Walker delta 12/3/1: planes 120 degrees apart, satellites 90 degrees apart, neighbors shifted by 30 degrees.
  const sets = walkerShell({
    count: 12,
    planes: 3,
    altitudeKm: 1014,
    inclinationDeg: 52,
    epochMs: START_MS,
    namePrefix: 'EXAMPLE',
  });
  expect(sets.map((set) => set.rightAscensionDeg)).toEqual([
    0, 0, 0, 0, 120, 120, 120, 120, 240, 240, 240, 240,
  ]);
  expect(sets.slice(0, 4).map((set) => set.meanAnomalyDeg)).toEqual([0, 90, 180, 270]);
  expect(sets[4].meanAnomalyDeg).toBe(30);
  expect(sets[8].meanAnomalyDeg).toBe(60);
  expect(sets[11].name).toBe('EXAMPLE 12');
  expect(sgp4RecordOf(sets[0]).error).toBe(0);
  expect(() =>
    walkerShell({ count: 10, planes: 3, altitudeKm: 1014, inclinationDeg: 52, epochMs: START_MS }),
  ).toThrow('10 satellites');
});

test('sun-synchronous inclination at 800 km', () => {
  // Common practice: 98.6 degrees at 800 km.
  expect(sunSynchronousInclinationDeg(7178)).toBeCloseTo(98.6, 1);
});
