import { expect, test } from 'vitest';
import { norm, subtract } from '../../src/vector.js';
import { perigeeHeightKm, syntheticCatalog } from './catalog.js';
import { atEpoch, setThrough, shifted, stateAt } from './mean-elements.js';

const START_MS = Date.UTC(2026, 11, 1);
const DAY_MS = 86_400_000;
const SETS = syntheticCatalog({ seed: 41, count: 300, epochMs: START_MS });

test('elements carried to another epoch fly the same orbit', () => {
  for (const set of SETS) {
    if (perigeeHeightKm(set) < 300) continue;
    const moved = atEpoch(set, set.epochMs - DAY_MS);
    if (moved === undefined) throw new Error(`${set.designator} fails`);
    for (const days of [-1, 0, 2]) {
      const ms = set.epochMs + days * DAY_MS;
      const before = stateAt(set, ms);
      const after = stateAt(moved, ms);
      if (before === undefined || after === undefined) throw new Error(`${set.designator} fails`);
      // What is left is drag to second order and, far out, terms that SGP4 ties to the epoch: 10 m in the median.
      const apartKm = norm(subtract(before.positionKm, after.positionKm));
      expect(apartKm, set.designator).toBeLessThan(set.meanMotionRevPerDay < 6.4 ? 1.5 : 0.4);
    }
  }
});

test('mean elements are found for a state days after their epoch', () => {
  for (const set of SETS.slice(0, 80)) {
    if (perigeeHeightKm(set) < 300) continue;
    const ms = set.epochMs + 3 * DAY_MS;
    const target = stateAt(set, ms);
    if (target === undefined) throw new Error(`${set.designator} fails`);
    const found = setThrough(target, ms, set);
    const reached = stateAt(found, ms);
    expect(norm(subtract(reached?.positionKm ?? [9, 9, 9], target.positionKm))).toBeLessThan(1e-5);
    expect(norm(subtract(reached?.velocityKmPerS ?? [9, 9, 9], target.velocityKmPerS))).toBeLessThan(1e-8);
    expect(found.meanMotionRevPerDay).toBeCloseTo(set.meanMotionRevPerDay, 4);
    // Near the equator the node, and with it the split of the tilt, is not well defined.
    if (set.inclinationDeg > 5) expect(found.inclinationDeg).toBeCloseTo(set.inclinationDeg, 2);
  }
});

test('an orbit tilted through the equator keeps its place', () => {
  const [base] = SETS.filter((set) => set.meanMotionRevPerDay > 13 && set.eccentricity < 0.01);
  const still = {
    meanMotionShare: 0,
    eccentricityX: 0,
    eccentricityY: 0,
    inclinationRad: 0,
    nodeRad: 0,
    longitudeRad: 0,
  };
  const flat = { ...base, inclinationDeg: 0.001 };
  const tilted = shifted(flat, { ...still, inclinationRad: (-0.002 * Math.PI) / 180 });
  expect(tilted.inclinationDeg).toBeCloseTo(0.001, 9);
  const [before, after] = [flat, tilted].map((set) => stateAt(set, set.epochMs)?.positionKm ?? [0, 0, 0]);
  // 0.002 degrees are a quarter of a kilometer at most in a low orbit.
  expect(Math.hypot(...before.map((x, axis) => x - after[axis]))).toBeLessThan(0.3);
});
