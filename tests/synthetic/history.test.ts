import { expect, test } from 'vitest';
import type { ElementSet } from '../../src/elements/element-set.js';
import { rtnFrame } from '../../src/ephemeris/rtn-frame.js';
import { rotate, scale, subtract } from '../../src/vector.js';
import { expectedSigmaRtnM } from './element-errors.js';
import { type SyntheticHistory, syntheticHistory } from './history.js';
import { stateAt } from './mean-elements.js';

const START_MS = Date.UTC(2026, 8, 1);
const DAY_MS = 86_400_000;
const LAW = { radialM: 60, transverseM: 250, transverseMPerDay: 600, normalM: 90 };
const OBJECTS = 60;
const DAYS = 40;
const HISTORY = syntheticHistory({
  seed: 51,
  objects: OBJECTS,
  startMs: START_MS,
  days: DAYS,
  setsPerDay: 1,
  law: LAW,
  maneuvering: 10,
});

function errorRtnM(history: SyntheticHistory, set: ElementSet, object: number, ageDays: number): number[] {
  const ms = set.epochMs + ageDays * DAY_MS;
  const truth = history.truthAt(object, ms);
  const state = stateAt(set, ms);
  if (state === undefined) throw new Error(`${set.designator} fails`);
  const difference = scale(subtract(state.positionKm, truth.positionKm), 1000);
  return [...rotate(rtnFrame(truth.positionKm, truth.velocityKmPerS), difference)];
}

test('errors against the truth grow by the stated law', () => {
  for (const ageDays of [0, 1, 3, 7]) {
    const squares = [0, 0, 0];
    let count = 0;
    HISTORY.sets.forEach((set, index) => {
      const object = Math.floor(index / DAYS);
      // Objects that maneuver are off by design.
      if (object < 10) return;
      errorRtnM(HISTORY, set, object, ageDays).forEach((error, axis) => {
        squares[axis] += error ** 2;
      });
      count += 1;
    });
    const expected = expectedSigmaRtnM(LAW, ageDays, HISTORY.sets[0]);
    for (const axis of [0, 1, 2]) {
      // 2000 draws tell a sigma to 1.6 %; rounding to two lines adds some meters.
      expect(Math.sqrt(squares[axis] / count) / expected[axis], `axis ${axis}, ${ageDays} d`).toBeGreaterThan(
        0.93,
      );
      expect(Math.sqrt(squares[axis] / count) / expected[axis], `axis ${axis}, ${ageDays} d`).toBeLessThan(
        1.07,
      );
    }
  }
});

test('normal errors of a flat orbit do not leak into the transverse ones', () => {
  const law = { radialM: 20, transverseM: 60, transverseMPerDay: 0, normalM: 200 };
  const flat = syntheticHistory({
    seed: 53,
    objects: 40,
    startMs: START_MS,
    days: 20,
    setsPerDay: 1,
    law,
    inclinationDeg: 20,
  });
  const along = flat.sets.map((set, index) => errorRtnM(flat, set, Math.floor(index / 20), 0)[1]);
  const sigma = Math.sqrt(along.reduce((sum, error) => sum + error ** 2, 0) / along.length);
  expect(sigma).toBeGreaterThan(50);
  expect(sigma).toBeLessThan(70);
});

test('without errors the sets follow the truth for a month', () => {
  const exact = syntheticHistory({
    seed: 52,
    objects: 3,
    startMs: START_MS,
    days: 60,
    setsPerDay: 0.2,
    law: { radialM: 0, transverseM: 0, transverseMPerDay: 0, normalM: 0 },
  });
  exact.sets.forEach((set, index) => {
    for (const ageDays of [0, 10, 30]) {
      const error = errorRtnM(exact, set, Math.floor(index / 12), ageDays);
      expect(Math.hypot(...error)).toBeLessThan(60);
    }
  });
});

test('a maneuver leaves the position as it was and takes the sets before it off course', () => {
  expect(HISTORY.maneuvers.length).toBe(10);
  HISTORY.maneuvers.forEach((maneuver, object) => {
    const before = HISTORY.truthAt(object, maneuver.ms - 1);
    const after = HISTORY.truthAt(object, maneuver.ms + 1);
    const jumpKm = Math.hypot(...subtract(after.positionKm, before.positionKm));
    expect(jumpKm).toBeLessThan(0.02);
    const own = HISTORY.sets.slice(object * DAYS, (object + 1) * DAYS);
    const last = own.findLast((set) => set.epochMs < maneuver.ms);
    if (last === undefined) throw new Error('no set before the maneuver');
    // A change of speed by dv lets the satellite drift by 3 dv a second (Clohessy-Wiltshire), less 4 dv / n of swing.
    const days = (maneuver.ms - last.epochMs) / DAY_MS + 5;
    const [, along] = errorRtnM(HISTORY, last, object, days);
    const drift = 3 * maneuver.changeMPerS * 5 * 86_400;
    expect(Math.abs(along - drift)).toBeLessThan(4 * 600 * days + 4 * Math.abs(maneuver.changeMPerS) * 1000);
    expect(Math.abs(along)).toBeGreaterThan(0.5 * Math.abs(drift) - 4 * 600 * days);
  });
});

test('sets come object by object in the order of their epochs', () => {
  HISTORY.sets.forEach((set, index) => {
    const before = HISTORY.sets[index - 1];
    if (before?.designator === set.designator) expect(set.epochMs).toBeGreaterThan(before.epochMs);
  });
  expect(new Set(HISTORY.sets.map((set) => set.designator)).size).toBe(OBJECTS);
});
