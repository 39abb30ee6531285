import { sgp4 } from 'satellite.js';
import { beforeAll, describe, expect, it } from 'vitest';
import type { ElementSet } from '../../../src/elements/element-set.js';
import { sgp4RecordOf } from '../../../src/elements/sgp4-record.js';
import { createPositionSamples } from '../../../src/encounters/position-samples.js';
import { loadSgp4 } from '../../../src/ephemeris/sgp4-module.js';
import { sgp4RecordsOf } from '../../../src/ephemeris/sgp4-records.js';
import {
  type FollowedObject,
  type FollowedPair,
  followPairs,
  REFINE_GRID_MS,
} from '../../../src/jobs/launch/follow-pairs.js';
import { pairTrend } from '../../../src/jobs/launch/pair-trend.js';
import { stateAt } from '../../synthetic/mean-elements.js';
import { batchSet, RELEASE_MS } from './batch-sets.js';

const HOUR_MS = 3_600_000;
const FOREVER = Number.POSITIVE_INFINITY;

type Stretch = readonly [set: ElementSet, fromMs: number, toMs: number];

function objectOf(...stretches: readonly Stretch[]): FollowedObject {
  return {
    phases: stretches.map(([set, fromMs, toMs]) => ({
      ...createPositionSamples({ records: sgp4RecordsOf([set]), place: 0 }, REFINE_GRID_MS),
      fromMs,
      toMs,
    })),
  };
}

beforeAll(loadSgp4);

type Components = { readonly x: number; readonly y: number; readonly z: number };

function apart(a: Components, b: Components): number {
  return Math.hypot(a.x - b.x, a.y - b.y, a.z - b.z);
}

/** Plain sampling of true states. */
function sampled(a: Stretch, b: Stretch, startMs: number, endMs: number, stepMs: number, limitKm: number) {
  const fromMs = Math.max(startMs, a[1], b[1]);
  const toMs = Math.min(endMs, a[2], b[2]);
  let closest = { ms: Number.NaN, km: Number.POSITIVE_INFINITY };
  let slowest = Number.POSITIVE_INFINITY;
  let lastInsideMs = Number.NEGATIVE_INFINITY;
  const records = [sgp4RecordOf(a[0]), sgp4RecordOf(b[0])];
  for (let ms = fromMs; ms <= toMs; ms += stepMs) {
    const one = sgp4(records[0], (ms - a[0].epochMs) / 60_000);
    const two = sgp4(records[1], (ms - b[0].epochMs) / 60_000);
    if (one === null || two === null) break;
    const km = apart(one.position, two.position);
    if (km < closest.km) closest = { ms, km };
    if (km > limitKm) continue;
    lastInsideMs = ms;
    slowest = Math.min(slowest, apart(one.velocity, two.velocity));
  }
  return { closest, slowest, lastInsideMs };
}

function follow(first: Stretch, second: Stretch, hours: number, limitKm: number): FollowedPair[] {
  return followPairs([objectOf(first), objectOf(second)], 2, {
    startMs: RELEASE_MS,
    endMs: RELEASE_MS + hours * HOUR_MS,
    limitKm,
  });
}

describe('a pair of one deployment', () => {
  const base = batchSet('B-A').set;

  it('that drifts apart is closest at release, and is followed to its last moment within the limit', () => {
    const first: Stretch = [base, RELEASE_MS, FOREVER];
    const second: Stretch = [
      batchSet('B-B', { meanAnomalyDeg: base.meanAnomalyDeg + 0.001, meanMotionRevPerDay: 15.803 }).set,
      RELEASE_MS,
      FOREVER,
    ];
    const [pair] = follow(first, second, 12, 25);
    const expected = sampled(first, second, RELEASE_MS, RELEASE_MS + 12 * HOUR_MS, 1000, 25);
    expect(pair.closestMs).toBe(RELEASE_MS);
    expect(pair.closestKm).toBeCloseTo(expected.closest.km, 6);
    // Within the second of the sampling.
    expect(pair.lastInsideMs - expected.lastInsideMs).toBeGreaterThan(-1);
    expect(pair.lastInsideMs - expected.lastInsideMs).toBeLessThan(1001);
    expect(Math.abs(pair.slowestKmPerS - expected.slowest)).toBeLessThan(1e-6);
    expect(pair.endMs).toBe(RELEASE_MS + 12 * HOUR_MS);
    expect(pair.endKm).toBeGreaterThan(25);
    const { trend, kmPerDay } = pairTrend(pair, 86_400 / 15.8);
    expect(trend).toBe('OPENING');
    // 0.003 revolutions a day, of 2 pi 6700 km each.
    expect(kmPerDay).toBeCloseTo(0.003 * 2 * Math.PI * 6710, 0);
  });

  it('that overtakes is closest where it does, and closing before', () => {
    const first: Stretch = [base, RELEASE_MS, FOREVER];
    const second: Stretch = [
      batchSet('B-B', { meanAnomalyDeg: base.meanAnomalyDeg - 0.3, meanMotionRevPerDay: 15.803 }).set,
      RELEASE_MS,
      FOREVER,
    ];
    for (const hours of [4, 11]) {
      const [pair] = follow(first, second, hours, 30);
      const expected = sampled(first, second, RELEASE_MS, RELEASE_MS + hours * HOUR_MS, 1000, 30);
      expect(pair.closestKm).toBeLessThanOrEqual(expected.closest.km + 1e-9);
      expect(pair.closestKm).toBeGreaterThan(expected.closest.km - 1e-3);
      expect(Math.abs(pair.closestMs - expected.closest.ms)).toBeLessThan(1001);
      expect(pairTrend(pair, 86_400 / 15.8).trend).toBe(hours === 4 ? 'CLOSING' : 'OPENING');
    }
  });

  it('that crosses fast is met between two samples, and outside of the limit it has no row', () => {
    const first: Stretch = [base, RELEASE_MS, FOREVER];
    // Half a turn of the node away: the two meet head to head, again and again.
    const crossing = batchSet('B-B', {
      rightAscensionDeg: (base.rightAscensionDeg + 180) % 360,
      meanAnomalyDeg: 71.5,
      meanMotionRevPerDay: 15.81,
    }).set;
    const second: Stretch = [crossing, RELEASE_MS, FOREVER];
    const expected = sampled(first, second, RELEASE_MS, RELEASE_MS + 6 * HOUR_MS, 500, 1);
    const limitKm = expected.closest.km + 3;
    const [pair] = follow(first, second, 6, limitKm);
    const again = sampled(first, second, RELEASE_MS, RELEASE_MS + 6 * HOUR_MS, 100, limitKm);
    expect(Math.abs(pair.closestMs - again.closest.ms)).toBeLessThan(101);
    expect(pair.closestKm).toBeLessThanOrEqual(again.closest.km + 1e-9);
    expect(Math.abs(pair.lastInsideMs - again.lastInsideMs)).toBeLessThan(101);
    expect(pair.closestSpeedKmPerS).toBeGreaterThan(5);
    expect(follow(first, second, 6, pair.closestKm - 0.001)).toEqual([]);
  });

  it('is followed over a change of sets, and not in between', () => {
    const changeMs = RELEASE_MS + 3 * HOUR_MS;
    const backMs = changeMs + HOUR_MS;
    const near = batchSet('B-B', { meanAnomalyDeg: base.meanAnomalyDeg + 0.02 }).set;
    const nearer = batchSet('B-B', { meanAnomalyDeg: base.meanAnomalyDeg + 0.01 }).set;
    // The object that is nearest of all holds at no time.
    const pairs = followPairs(
      [
        objectOf([base, RELEASE_MS, FOREVER]),
        objectOf([near, RELEASE_MS, changeMs], [nearer, backMs, backMs + HOUR_MS]),
        objectOf([base, RELEASE_MS - 2 * HOUR_MS, RELEASE_MS - HOUR_MS]),
      ],
      3,
      { startMs: RELEASE_MS, endMs: RELEASE_MS + 9 * HOUR_MS, limitKm: 25 },
    );
    expect(pairs).toHaveLength(1);
    const [pair] = pairs;
    const expected = sampled(
      [base, RELEASE_MS, FOREVER],
      [nearer, backMs, backMs + HOUR_MS],
      RELEASE_MS,
      RELEASE_MS + 9 * HOUR_MS,
      1000,
      25,
    );
    expect(pair.closestKm).toBeCloseTo(expected.closest.km, 6);
    expect(pair.closestMs).toBeGreaterThanOrEqual(backMs);
    expect([pair.startMs, pair.endMs, pair.lastInsideMs]).toEqual([
      RELEASE_MS,
      backMs + HOUR_MS,
      backMs + HOUR_MS,
    ]);
    expect([pair.lastStretch.fromMs, pair.lastStretch.toMs]).toEqual([backMs, backMs + HOUR_MS]);
  });

  it('is left out where told, and so are those that only fly along among themselves', () => {
    const objects = [0, 0.001, 0.002, 0.003].map((deg) =>
      objectOf([batchSet('B-A', { meanAnomalyDeg: 254 + deg }).set, RELEASE_MS, FOREVER]),
    );
    const window = { startMs: RELEASE_MS, endMs: RELEASE_MS + HOUR_MS, limitKm: 25 };
    const pairs = followPairs(objects, 2, window, (first, second) => first === 0 && second === 3);
    expect(pairs.map(({ first, second }) => [first, second])).toEqual([
      [0, 1],
      [0, 2],
      [1, 2],
      [1, 3],
    ]);
  });

  it('ends where SGP4 gives one of them up', () => {
    const decaying = batchSet('B-B', { meanMotionRevPerDay: 16.3, bstar: 0.05 }).set;
    const first: Stretch = [{ ...base, meanMotionRevPerDay: 16.3 }, RELEASE_MS, FOREVER];
    const second: Stretch = [decaying, RELEASE_MS, FOREVER];
    const [pair] = follow(first, second, 72, 25);
    expect(pair.closestKm).toBeLessThan(1e-6);
    expect(pair.endMs).toBeLessThan(RELEASE_MS + 72 * HOUR_MS);
    expect(stateAt(decaying, pair.endMs)).toBeDefined();
  });
});
