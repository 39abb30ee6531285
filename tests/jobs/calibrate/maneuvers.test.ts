import { describe, expect, test } from 'vitest';
import type { ElementSet } from '../../../src/elements/element-set.js';
import { findManeuvers, type Maneuver, stretchesBetween } from '../../../src/jobs/calibrate/maneuvers.js';
import { setDifferences } from '../../../src/jobs/calibrate/set-differences.js';
import { RECORD_BYTES, setRecordsOver, writeRecord } from '../../../src/jobs/calibrate/set-records.js';
import { type SyntheticManeuver, syntheticHistory } from './synthetic-history.js';

const MS_PER_DAY = 86_400_000;
const START_MS = Date.UTC(2030, 0, 1);
const LAW = { radialM: 60, transverseM: 250, transverseMPerDay: 400, normalM: 100 };
/** Scatter of the axis from one set to the next: sqrt 2 times 2/3 of the drift over the phase rate. */
const AXIS_STEP_M = (Math.SQRT2 * (2 / 3) * 400) / (2 * Math.PI * 14.6);

function history(seed: number, maneuvers: readonly SyntheticManeuver[] = [], days = 120): ElementSet[] {
  return syntheticHistory({
    designator: 310_000 + seed,
    seed,
    startMs: START_MS,
    days,
    setsPerDay: 2,
    law: LAW,
    meanMotionRevPerDay: 14.6,
    inclinationDeg: 55,
    maneuvers,
  });
}

function maneuversIn(sets: readonly ElementSet[]): Maneuver[] {
  const records = setRecordsOver(new ArrayBuffer(sets.length * RECORD_BYTES));
  sets.forEach((set, i) => {
    writeRecord(records, i, set, 0);
  });
  const { epochMs, jumpsM } = setDifferences(
    records,
    sets.map((_, i) => i),
  );
  return findManeuvers(epochMs, jumpsM);
}

function lastBefore(sets: readonly ElementSet[], day: number): number {
  return sets.findIndex((set) => set.epochMs > START_MS + day * MS_PER_DAY) - 1;
}

describe('maneuvers', () => {
  test('none in histories that only scatter: 25 objects, 6000 steps', () => {
    for (let seed = 1; seed <= 25; seed++) expect(maneuversIn(history(seed))).toEqual([]);
  });

  test.each([12, -12])('a change of axis of %d times its scatter is found where it happened', (times) => {
    for (let seed = 1; seed <= 10; seed++) {
      const sets = history(seed, [{ day: 60, semiMajorAxisM: times * AXIS_STEP_M }]);
      const found = maneuversIn(sets);
      expect(found.map((maneuver) => maneuver.before)).toEqual([lastBefore(sets, 60)]);
      expect(Math.abs(found[0].semiMajorAxisChangeM - times * AXIS_STEP_M)).toBeLessThan(4.5 * AXIS_STEP_M);
    }
  });

  test('a change of the plane alone is found', () => {
    const sets = history(3, [{ day: 47.3, semiMajorAxisM: 0, inclinationDeg: 0.02 }]);
    const found = maneuversIn(sets);
    expect(found.map((maneuver) => maneuver.before)).toEqual([lastBefore(sets, 47.3)]);
    // 0.02 deg at 7070 km are 2468 m, give or take the errors of two planes.
    expect(Math.abs(found[0].planeChangeM - 2468)).toBeLessThan(4.5 * Math.SQRT2 * 100);
  });

  test('a station-keeping row of changes, one a week, is found one by one', () => {
    const days = [20, 27, 34, 41, 48, 55, 62, 69, 76, 83, 90, 97];
    const sets = history(
      4,
      days.map((day) => ({ day, semiMajorAxisM: 100 })),
    );
    expect(maneuversIn(sets).map((maneuver) => maneuver.before)).toEqual(
      days.map((day) => lastBefore(sets, day)),
    );
  });

  test('a single bad set is no maneuver', () => {
    const sets = history(5);
    for (const at of [0, 1, 30, 100, sets.length - 1]) {
      const withBad = sets.map((set, i) =>
        i === at
          ? { ...set, meanMotionRevPerDay: set.meanMotionRevPerDay + 0.001, inclinationDeg: 55.3 }
          : set,
      );
      expect(maneuversIn(withBad)).toEqual([]);
    }
  });

  test('a jump before the very last set is not called: nothing confirms it', () => {
    const sets = history(6, [{ day: 119.9, semiMajorAxisM: 1000 }], 130);
    const cut = sets.slice(0, lastBefore(sets, 119.9) + 2);
    expect(maneuversIn(cut)).toEqual([]);
    expect(maneuversIn(sets.slice(0, cut.length + 1))).toHaveLength(1);
  });

  test('with fewer than eight neighbors nothing is called', () => {
    const sets = history(7, [{ day: 3, semiMajorAxisM: 1000 }]);
    expect(maneuversIn(sets.slice(0, 11))).toEqual([]);
    expect(maneuversIn(sets.slice(0, 16))).toHaveLength(1);
  });

  test('stretches are numbered from maneuver to maneuver', () => {
    const at = (before: number): Maneuver => ({ before, semiMajorAxisChangeM: 0, planeChangeM: 0 });
    expect([...stretchesBetween([at(1), at(2), at(4)], 7)]).toEqual([0, 0, 1, 2, 2, 3, 3]);
    expect([...stretchesBetween([], 3)]).toEqual([0, 0, 0]);
  });
});
