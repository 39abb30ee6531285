import { describe, expect, test } from 'vitest';
import type { ElementSet } from '../../../src/elements/element-set.js';
import { sgp4RecordOf } from '../../../src/elements/sgp4-record.js';
import { JUMP_LAGS, JUMP_SIZE, setDifferences } from '../../../src/jobs/calibrate/set-differences.js';
import {
  RECORD_BYTES,
  type SetRecords,
  setRecordsOver,
  writeRecord,
} from '../../../src/jobs/calibrate/set-records.js';
import { AGE_KNOTS_DAYS } from '../../../src/uncertainty/calibrate-age-knots.js';
import { sgp4StateAt } from '../../ephemeris/sgp4-state.js';
import { syntheticHistory } from './synthetic-history.js';

const MS_PER_DAY = 86_400_000;
const KNOTS = AGE_KNOTS_DAYS.length;
const NO_ERRORS = { radialM: 0, transverseM: 0, transverseMPerDay: 0, normalM: 0 };
const SOME_ERRORS = { radialM: 60, transverseM: 250, transverseMPerDay: 500, normalM: 100 };
const request = {
  designator: 310_001,
  seed: 1,
  startMs: Date.UTC(2030, 0, 1),
  days: 40,
  setsPerDay: 2,
  law: SOME_ERRORS,
  meanMotionRevPerDay: 14.6,
  inclinationDeg: 55,
};

function recordsOf(sets: readonly ElementSet[]): SetRecords {
  const records = setRecordsOver(new ArrayBuffer(sets.length * RECORD_BYTES));
  sets.forEach((set, i) => {
    writeRecord(records, i, set, 0);
  });
  return records;
}

function differencesOf(sets: readonly ElementSet[]) {
  return setDifferences(
    recordsOf(sets),
    sets.map((_, i) => i),
  );
}

describe('differences of sets', () => {
  test('older minus newer in RTN of the newer, worked out anew from two states', () => {
    const sets = syntheticHistory(request);
    const { newer, rtnM } = differencesOf(sets);
    let compared = 0;
    for (let older = 0; older < sets.length; older += 7) {
      for (let knot = 0; knot < KNOTS; knot++) {
        const partner = newer[older * KNOTS + knot];
        if (partner < 0) continue;
        const a = new Float64Array(6);
        const b = new Float64Array(6);
        const { epochMs } = sets[partner];
        sgp4StateAt(sgp4RecordOf(sets[older]), sets[older].epochMs, epochMs, a);
        sgp4StateAt(sgp4RecordOf(sets[partner]), epochMs, epochMs, b);
        const [x, y, z, u, v, w] = b;
        const d = [a[0] - x, a[1] - y, a[2] - z];
        const r = Math.hypot(x, y, z);
        const h = [y * w - z * v, z * u - x * w, x * v - y * u];
        const hLength = Math.hypot(...h);
        const radial = (d[0] * x + d[1] * y + d[2] * z) / r;
        const normal = (d[0] * h[0] + d[1] * h[1] + d[2] * h[2]) / hLength;
        // The part of the velocity square to the radius points along T.
        const along = (x * u + y * v + z * w) / r ** 2;
        const t = [u - along * x, v - along * y, w - along * z];
        const transverse = (d[0] * t[0] + d[1] * t[1] + d[2] * t[2]) / Math.hypot(...t);
        const at = (older * KNOTS + knot) * 3;
        expect(rtnM[at]).toBeCloseTo(radial * 1000, 3);
        expect(rtnM[at + 1]).toBeCloseTo(transverse * 1000, 3);
        expect(rtnM[at + 2]).toBeCloseTo(normal * 1000, 3);
        compared++;
      }
    }
    expect(compared).toBeGreaterThan(50);
  });

  test('sets without errors agree with one another at all ages to centimeters', () => {
    const { newer, rtnM, jumpsM } = differencesOf(syntheticHistory({ ...request, law: NO_ERRORS }));
    expect(newer.filter((partner) => partner >= 0).length).toBeGreaterThan(400);
    expect(Math.max(...rtnM.map(Math.abs))).toBeLessThan(0.05);
    expect(Math.max(...jumpsM.filter((value) => !Number.isNaN(value)).map(Math.abs))).toBeLessThan(0.05);
  });

  test('an older set ahead along its track gives a positive T, one that lies higher a positive R', () => {
    const [first, second] = syntheticHistory({ ...request, law: NO_ERRORS, setsPerDay: 1, days: 2.2 });
    const ahead = { ...first, meanAnomalyDeg: first.meanAnomalyDeg + 0.01 };
    const knot = AGE_KNOTS_DAYS.indexOf(1);
    const { rtnM } = differencesOf([ahead, second]);
    const axisM = 7_070_000;
    expect(rtnM[knot * 3 + 1]).toBeGreaterThan(axisM * 0.01 * (Math.PI / 180) * 0.95);
    const slower = { ...first, meanMotionRevPerDay: first.meanMotionRevPerDay * (1 - 1e-4) };
    expect(differencesOf([slower, second]).rtnM[knot * 3 + 1]).toBeLessThan(-10_000);
  });

  test('pairs a set with the one nearest to the knot, and none outside the window', () => {
    const base = syntheticHistory({ ...request, law: NO_ERRORS, days: 1 })[0];
    const at = (day: number): ElementSet => ({ ...base, epochMs: base.epochMs + day * MS_PER_DAY });
    const { newer } = differencesOf([at(0), at(0.97), at(1.05), at(1.19), at(3.7), at(12.5), at(14.4)]);
    const partnersOfFirst = Object.fromEntries(AGE_KNOTS_DAYS.map((age, knot) => [age, newer[knot]]));
    expect(partnersOfFirst).toEqual({
      0.25: -1,
      0.5: -1,
      1: 1,
      2: -1,
      3: -1,
      5: -1,
      7: -1,
      10: -1,
      14: 6,
      21: -1,
      30: -1,
    });
  });

  test('a set without a state at its epoch is taken out and leaves no hole', () => {
    const sets = syntheticHistory(request);
    const bad = { ...sets[5], eccentricity: 0.99, meanMotionRevPerDay: 16 };
    const withBad = [...sets.slice(0, 5), bad, ...sets.slice(5)];
    const clean = differencesOf(sets);
    const found = differencesOf(withBad);
    expect(found.rejected).toEqual([5]);
    expect(found.sets).toHaveLength(sets.length);
    expect(found.newer).toEqual(clean.newer);
    expect(found.rtnM).toEqual(clean.rtnM);
    expect(found.jumpsM).toEqual(clean.jumpsM);
  });

  test('a set that decays before the next is counted, not paired', () => {
    const [first, , , , fifth] = syntheticHistory({ ...request, law: NO_ERRORS });
    const doomed = { ...first, meanMotionRevPerDay: 16.4, bstar: 0.2 };
    const { failedPairs, newer, rejected } = differencesOf([doomed, fifth]);
    expect(rejected).toEqual([]);
    expect(failedPairs).toBe(1);
    expect([...newer].every((partner) => partner === -1)).toBe(true);
  });

  test('jumps show a change of axis and plane in meters', () => {
    const sets = syntheticHistory({
      ...request,
      law: NO_ERRORS,
      maneuvers: [{ day: 10, semiMajorAxisM: 250, inclinationDeg: 0.01 }],
    });
    const { epochMs, jumpsM } = differencesOf(sets);
    const gap = epochMs.findIndex((ms) => ms > request.startMs + 10 * MS_PER_DAY) - 1;
    for (const lag of [1, 2, 3]) {
      const at = (gap * JUMP_LAGS + lag - 1) * JUMP_SIZE;
      // The other inclination alone moves the mean axis by 1.5 m (Kozai's mean motion against Brouwer's).
      expect(Math.abs(jumpsM[at] - 250)).toBeLessThan(2);
      // 0.01 deg at 7070 km, a little more for the node that drifts off by then.
      const plane = Math.hypot(jumpsM[at + 1], jumpsM[at + 2], jumpsM[at + 3]);
      expect(plane).toBeGreaterThan(1233);
      expect(plane).toBeLessThan(1250);
    }
  });
});
