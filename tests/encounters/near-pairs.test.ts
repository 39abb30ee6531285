import { describe, expect, it } from 'vitest';
import {
  farthestInStepKm,
  isConvex,
  radialAcceleration,
  stepBounds,
  tidePerS2,
} from '../../src/encounters/bounds.js';
import { cellOf, cellsWithin, directionCells } from '../../src/encounters/direction-cells.js';
import { createNearPairs, listsOf, sweepStep, takeNearPairs } from '../../src/encounters/near-pairs.js';
import { shellFloorKm, shellOf } from '../../src/encounters/shell.js';
import {
  createStepKernel,
  FLAT,
  RECORD_LOW,
  RECORD_SIZE,
  type StepKernel,
} from '../../src/encounters/step-kernel.js';
import type { SlabTracks } from '../../src/ephemeris/slab-tracks.js';
import { createTrackCursor, moveCursor } from '../../src/ephemeris/track-cursor.js';
import { move, stateOnOrbit } from '../ephemeris/motion-under-gravity.js';
import { type Random, seededRandom } from '../synthetic/random.js';

function direction(random: Random): number[] {
  const z = random.between(-1, 1);
  const turn = random.between(0, 2 * Math.PI);
  const ring = Math.sqrt(1 - z * z);
  return [ring * Math.cos(turn), ring * Math.sin(turn), z];
}

/** A direction that another just reaches: close to `angle` from it. */
function nearby(random: Random, [x, y, z]: readonly number[], angle: number): number[] {
  for (;;) {
    const other = direction(random);
    const along = other[0] * x + other[1] * y + other[2] * z;
    const side = [other[0] - along * x, other[1] - along * y, other[2] - along * z];
    const size = Math.hypot(...side);
    if (size < 1e-6) continue;
    const off = angle * random.between(0.93, 1);
    return [x, y, z].map((value, i) => value * Math.cos(off) + (side[i] / size) * Math.sin(off));
  }
}

describe('cells of directions', () => {
  it.each([0.02, 0.075, 0.2, 0.35, 0.9, 2])(
    'list every cell within %d rad, poles and date line included',
    (angle) => {
      const random = seededRandom(21);
      const cells = directionCells(angle);
      const lists = cellsWithin(cells, angle);
      const within = (a: number, b: number) =>
        lists.cells.subarray(lists.start[a], lists.start[a + 1]).includes(b);
      const missed: number[][] = [];
      const special = [
        [0, 0, 1],
        [0, 0, -1],
        [1, 0, 0],
        [-1, 0, 0],
        [-1, -0, 0],
        [0, 1, 0],
        [0, -1, 0],
      ];
      for (let k = 0; k < 30_000; k++) {
        const kind = k % 4;
        const one =
          kind === 0
            ? special[((k / 4) % special.length) | 0]
            : kind === 1
              ? nearby(random, [0, 0, 1], 2 * angle)
              : kind === 2
                ? nearby(random, [1, 0, 0], 0.01)
                : direction(random);
        const other = nearby(random, one, Math.min(angle, Math.PI));
        const a = cellOf(cells, 7000 * one[0], 7000 * one[1], one[2]);
        const b = cellOf(cells, 7000 * other[0], 7000 * other[1], other[2]);
        if (!(a >= 0 && a < cells.count && within(a, b) && within(b, a))) missed.push([...one, ...other]);
      }
      expect(missed).toEqual([]);
    },
  );

  it('leave most of the sphere out', () => {
    const cells = directionCells(0.1);
    const lists = cellsWithin(cells, 0.1);
    expect(lists.cells.length / cells.count).toBeLessThan(13);
    expect(cells.count).toBeGreaterThan(800);
  });
});

describe('shells', () => {
  it('never fall with the radius, and start no higher than what they hold', () => {
    let before = -1;
    let wrong = 0;
    for (let radiusKm = 6200; radiusKm < 120_000; radiusKm += 0.37) {
      const shell = shellOf(radiusKm);
      if (shell < before || shellFloorKm(shell) > radiusKm) wrong++;
      before = shell;
    }
    expect(wrong).toBe(0);
    expect(before).toBeGreaterThan(7000);
  });
});

/** Tracks of one segment each, from states in its middle. */
function tracksOf(middles: readonly (readonly number[])[], lengthS: number): SlabTracks {
  const count = middles.length;
  const nodes = new Float64Array(12 * count);
  middles.forEach((state, k) => {
    nodes.set(move(state, -lengthS / 2), 12 * k);
    nodes.set(move(state, lengthS / 2), 12 * k + 6);
  });
  return {
    startMs: 0,
    nodes,
    firstNode: Int32Array.from(middles, (_, k) => 2 * k),
    segmentCount: new Int32Array(count).fill(1),
    segmentS: new Float64Array(count).fill(lengthS),
    originS: new Float64Array(count),
    fromS: new Float64Array(count),
    toS: new Float64Array(count).fill(lengthS),
    endS: new Float64Array(count).fill(lengthS),
    toleranceKm: new Float64Array(count).fill(0.01),
    worstDefectKm: 0,
  };
}

/** Near-circular, eccentric and very low orbits where they are in one thin and crowded layer. */
function crowd(random: Random, count: number): { states: number[][]; curvature: Float64Array } {
  const states: number[][] = [];
  const curvature = new Float64Array(count);
  for (let k = 0; k < count; k++) {
    const kind = k % 10;
    const radiusKm = kind === 9 ? random.between(6530, 6560) : random.between(6850, 6870);
    const e = kind === 0 ? random.between(0.5, 0.75) : kind < 4 ? random.between(0.08, 0.12) : 0.001;
    // On the way up or down through the layer, or at its perigee.
    const perigeeKm = kind > 3 ? radiusKm : radiusKm - random.between(250, 380);
    const cosine = ((perigeeKm * (1 + e)) / radiusKm - 1) / e;
    const anomaly = Math.acos(Math.max(-1, Math.min(1, cosine))) * random.choice([-1, 1]);
    states.push(stateOnOrbit(random, perigeeKm, e, anomaly));
    curvature[k] = radialAcceleration(e, perigeeKm);
  }
  return { states, curvature };
}

/** Parts of a step that paths are looked at in. */
const PATH_STEPS = 50;

type Crowd = { readonly states: readonly (readonly number[])[]; readonly curvature: Float64Array };

/** The pairs of one step of a crowd, each as `a b` as often as it was handed over. */
function pairsOf(
  { states, curvature }: Crowd,
  primaryCount: number,
  halfStepS: number,
  missKm: number,
): { found: string[]; kernel: StepKernel } {
  const count = states.length;
  const lengthS = 2 * halfStepS + 20;
  const tracks = tracksOf(states, lengthS);
  const toleranceKm = new Float64Array(count).fill(0.05);
  const bounds = stepBounds(missKm, halfStepS, 0.05);
  const cells = directionCells(bounds.ordinaryAngle);
  const lists = listsOf(cells, bounds);
  const listed = lists.reduce((sum, each) => sum + each.start.length + each.cells.length, 0);
  const pairs = createNearPairs();
  const kernel = createStepKernel(
    count,
    primaryCount,
    { cells: cells.count, rows: cells.firstCell.length, listed },
    (handed) => takeNearPairs(pairs, handed, kernel.records, bounds, toleranceKm),
  );
  kernel.curvature.set(curvature);
  kernel.toS.set(tracks.endS);
  kernel.segmentS.set(tracks.segmentS);
  kernel.marginKm.set(toleranceKm.map((tolerance) => bounds.baseReachKm / 2 + tolerance));
  kernel.layCells(cells, lists);
  const cursor = createTrackCursor(tracks, { ...kernel, segmentEndS: new Float64Array(count) });
  for (let k = 0; k < count; k++) {
    kernel.candidates[k] = k;
    moveCursor(cursor, k, lengthS / 2);
  }
  kernel.evaluate(count, lengthS / 2, halfStepS);
  sweepStep(kernel, bounds, true, primaryCount < count);
  const found: string[] = [];
  for (let k = 0; k < pairs.size; k++) found.push(`${pairs.first[k]} ${pairs.second[k]}`);
  return { found, kernel };
}

describe('pairs of one step', () => {
  it.each([
    { halfStepS: 24, missKm: 60 },
    { halfStepS: 80, missKm: 30 },
    { halfStepS: 150, missKm: 20 },
  ])('hold every pair that comes close, half step $halfStepS s', ({ halfStepS, missKm }) => {
    const random = seededRandom(31);
    const count = 2000;
    const { states, curvature } = crowd(random, count);
    const { found: handed, kernel } = pairsOf({ states, curvature }, count, halfStepS, missKm);
    const found = new Set(handed);
    expect(found.size, 'a pair twice').toBe(handed.length);
    const primaryCount = 900;
    const sides = pairsOf({ states, curvature }, primaryCount, halfStepS, missKm).found;
    const expected = handed.filter((pair) => Number(pair.split(' ')[0]) < primaryCount);
    expect(sides.sort()).toEqual(expected.sort());
    const widths = Array.from(
      states,
      (_, k) =>
        kernel.records[RECORD_SIZE * k + RECORD_LOW + 1] - kernel.records[RECORD_SIZE * k + RECORD_LOW],
    );
    expect(widths.filter((shells) => shells > 100).length, 'steep orbits').toBeGreaterThan(10);

    const paths = states.map((state) => pathOf(state, halfStepS));
    const missed: string[] = [];
    let close = 0;
    for (let a = 0; a < count; a++) {
      for (let b = a + 1; b < count; b++) {
        const lowest = lowestKm(paths[a], paths[b]);
        if (lowest > missKm) continue;
        close++;
        if (!found.has(`${a} ${b}`)) missed.push(`${a} ${b}: ${lowest} km`);
        expectOneMinimum(states[a], states[b], halfStepS, missKm + 0.2, distancesOf(paths[a], paths[b]));
      }
    }
    expect(missed).toEqual([]);
    expect(close).toBeGreaterThan(100);
    // Finding nearly all pairs would be no art.
    expect(found.size).toBeLessThan(10 * close + 200);
  });
});

/** Positions from half a step before a state to half a step after it. */
function pathOf(state: readonly number[], halfStepS: number): Float64Array {
  const path = new Float64Array(3 * (PATH_STEPS + 1));
  let now = move(state, -halfStepS, 10);
  for (let k = 0; k <= PATH_STEPS; k++) {
    path.set(now.slice(0, 3), 3 * k);
    now = move(now, (2 * halfStepS) / PATH_STEPS, 10);
  }
  return path;
}

/** The relative path is straight from one part of the step to the next, to within a meter. */
function lowestKm(one: Float64Array, two: Float64Array): number {
  let lowest2 = Number.POSITIVE_INFINITY;
  let x = two[0] - one[0];
  let y = two[1] - one[1];
  let z = two[2] - one[2];
  for (let k = 3; k < one.length; k += 3) {
    const dx = two[k] - one[k] - x;
    const dy = two[k + 1] - one[k + 1] - y;
    const dz = two[k + 2] - one[k + 2] - z;
    const along = -(x * dx + y * dy + z * dz) / (dx * dx + dy * dy + dz * dz);
    const part = Math.max(0, Math.min(1, along));
    lowest2 = Math.min(lowest2, (x + part * dx) ** 2 + (y + part * dy) ** 2 + (z + part * dz) ** 2);
    x += dx;
    y += dy;
    z += dz;
  }
  return Math.sqrt(lowest2);
}

function distancesOf(one: Float64Array, two: Float64Array): number[] {
  return Array.from({ length: PATH_STEPS + 1 }, (_, k) =>
    Math.hypot(two[3 * k] - one[3 * k], two[3 * k + 1] - one[3 * k + 1], two[3 * k + 2] - one[3 * k + 2]),
  );
}

/** Where the search takes the distance of a pair for convex, it falls once and rises once. */
function expectOneMinimum(
  one: readonly number[],
  two: readonly number[],
  halfStepS: number,
  reachKm: number,
  distances: readonly number[],
): void {
  const speed = Math.hypot(...[3, 4, 5].map((i) => two[i] - one[i]));
  const tide = tidePerS2(Math.min(Math.hypot(...one.slice(0, 3)), Math.hypot(...two.slice(0, 3))) - 100);
  const farthest = farthestInStepKm(halfStepS, reachKm, tide, speed);
  expect(Math.max(...distances)).toBeLessThan(farthest);
  if (!isConvex(halfStepS, farthest, tide, speed)) return;
  const lowest = distances.indexOf(Math.min(...distances));
  expect(
    distances.every((d, k) => k === 0 || (k <= lowest ? d < distances[k - 1] : d > distances[k - 1])),
  ).toBe(true);
}

describe('the kernel', () => {
  const halfStepS = 60;

  it('hands over each pair whose straight lines pass near, once, and no other', () => {
    const random = seededRandom(43);
    // More pairs than are handed over at a time.
    const count = 5000;
    const states = Array.from({ length: count }, () =>
      stateOnOrbit(random, random.between(7000, 7010), 0.0005, random.between(0, 6)),
    );
    const reachKm = 300;
    const bounds = stepBounds(reachKm, halfStepS, 0.05);
    const cells = directionCells(bounds.ordinaryAngle);
    const lists = listsOf(cells, bounds);
    const times = new Map<string, number>();
    let calls = 0;
    const kernel = createStepKernel(
      count,
      count,
      { cells: cells.count, rows: cells.firstCell.length, listed: 100_000 },
      (handed) => {
        calls++;
        for (let k = 0; k < handed.length; k += 2) {
          const pair = `${Math.min(handed[k], handed[k + 1])} ${Math.max(handed[k], handed[k + 1])}`;
          times.set(pair, (times.get(pair) ?? 0) + 1);
        }
      },
    );
    const tracks = tracksOf(states, 200);
    kernel.toS.set(tracks.endS);
    kernel.segmentS.set(tracks.segmentS);
    kernel.marginKm.fill(20);
    kernel.layCells(cells, lists);
    const cursor = createTrackCursor(tracks, { ...kernel, segmentEndS: new Float64Array(count) });
    for (let k = 0; k < count; k++) {
      kernel.candidates[k] = k;
      moveCursor(cursor, k, 100);
    }
    kernel.evaluate(count, 100, halfStepS);
    const otherwise = states.filter((_, k) => {
      const [x, y, z] = kernel.records.subarray(RECORD_SIZE * k);
      const radiusKm = Math.sqrt(x * x + y * y + z * z);
      return kernel.groups[k] !== FLAT * cells.count + cellOf(cells, x, y, z / radiusKm);
    });
    expect(otherwise, 'in other cells than those of directionCells').toEqual([]);
    const shells = states.filter((_, k) => {
      const [x, y, z, vx, vy, vz, low, high] = kernel.records.subarray(RECORD_SIZE * k);
      const radiusKm = Math.sqrt(x * x + y * y + z * z);
      const swingKm = (Math.abs(x * vx + y * vy + z * vz) / radiusKm) * halfStepS + 20;
      // A hundredth of a kilometer for single precision.
      return !(
        low >= shellOf(radiusKm - swingKm - 0.01) &&
        low <= shellOf(radiusKm - swingKm + 0.01) &&
        high >= shellOf(radiusKm + swingKm - 0.01) &&
        high <= shellOf(radiusKm + swingKm + 0.01)
      );
    });
    expect(shells, 'in other shells').toEqual([]);
    kernel.sweep(FLAT, FLAT, 1, true, 1, reachKm);
    expect(calls).toBeGreaterThan(1);
    expect([...times.values()].every((each) => each === 1)).toBe(true);
    const wide = [...times.keys()].filter((pair) => {
      const [a, b] = pair.split(' ').map(Number);
      return straightKm(kernel.records, a, b, halfStepS) > reachKm + 1;
    });
    expect(wide).toEqual([]);
    const missed: string[] = [];
    for (let a = 0; a < count; a++) {
      for (let b = a + 1; b < count; b++) {
        if (straightKm(kernel.records, a, b, halfStepS) < reachKm && !times.has(`${a} ${b}`))
          missed.push(`${a} ${b}`);
      }
    }
    expect(missed).toEqual([]);
  });
});

/** How near the straight lines of two records pass during a step. */
function straightKm(records: Float32Array, a: number, b: number, halfStepS: number): number {
  const i = RECORD_SIZE * a;
  const k = RECORD_SIZE * b;
  const x = records[k] - records[i];
  const y = records[k + 1] - records[i + 1];
  const z = records[k + 2] - records[i + 2];
  const vx = records[k + 3] - records[i + 3];
  const vy = records[k + 4] - records[i + 4];
  const vz = records[k + 5] - records[i + 5];
  const nearestS = -(x * vx + y * vy + z * vz) / (vx * vx + vy * vy + vz * vz);
  const timeS = Math.max(-halfStepS, Math.min(halfStepS, nearestS));
  return Math.sqrt((x + timeS * vx) ** 2 + (y + timeS * vy) ** 2 + (z + timeS * vz) ** 2);
}
