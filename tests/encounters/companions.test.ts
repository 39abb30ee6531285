import { beforeAll, describe, expect, it } from 'vitest';
import { findCompanions } from '../../src/encounters/companions.js';
import { loadSgp4 } from '../../src/ephemeris/sgp4-module.js';
import { walkerShell } from '../synthetic/catalog.js';
import { searchObjectsOf } from './search-objects.js';

const START_MS = Date.UTC(2026, 11, 1);

/** One satellite, and followers of it by a distance along the orbit, degrees of mean anomaly. */
function train(offsetsDeg: readonly number[]) {
  const [leader] = walkerShell({
    count: 1,
    planes: 1,
    altitudeKm: 550,
    inclinationDeg: 53,
    epochMs: START_MS,
  });
  return [
    leader,
    ...offsetsDeg.map((offset) => ({ ...leader, meanAnomalyDeg: leader.meanAnomalyDeg + offset })),
  ];
}

const RULES = {
  startMs: START_MS,
  endMs: START_MS + 86_400_000,
  missKm: 5,
  withinPrimaries: true,
  skippedPairs: new Set<number>(),
};

beforeAll(loadSgp4);

describe('findCompanions', () => {
  it('tells a pair that stays near once, with its distances, and leaves wider ones out', () => {
    // 0.03 degrees of a 6928 km orbit are 3.6 km; 0.06 are 7.3 km: a neighbor, but never within 5 km.
    const objects = searchObjectsOf(train([0.03, 0.09]), 3);
    const found = findCompanions(objects, RULES);
    expect(found.map(({ first, second }) => [first, second])).toEqual([[0, 1]]);
    expect(found[0].closestKm).toBeGreaterThan(3.5);
    expect(found[0].farthestKm).toBeLessThan(3.8);
    expect(found[0].fastestKmPerS).toBeLessThan(0.01);
    expect(found[0].closestMs).toBeGreaterThanOrEqual(RULES.startMs);
  });

  it('knows the roles: others are no companions of each other', () => {
    const sets = train([0.03, 0.03]);
    expect(
      findCompanions(searchObjectsOf(sets, 1), RULES).map(({ first, second }) => [first, second]),
    ).toEqual([
      [0, 1],
      [0, 2],
    ]);
    expect(
      findCompanions(searchObjectsOf(sets, 2), { ...RULES, withinPrimaries: false }).map(
        ({ first, second }) => [first, second],
      ),
    ).toEqual([
      [0, 2],
      [1, 2],
    ]);
  });

  it('does not take a pair that is close and slow at the start only', () => {
    const [leader, follower] = train([0.03]);
    const drifting = { ...follower, meanMotionRevPerDay: leader.meanMotionRevPerDay * 1.0005 };
    expect(findCompanions(searchObjectsOf([leader, drifting], 2), RULES)).toEqual([]);
  });
});
