import { describe, expect, it } from 'vitest';
import {
  farthestInStepKm,
  isConvex,
  radialAcceleration,
  stepBounds,
  tidePerS2,
} from '../../src/encounters/bounds.js';
import {
  createColumns,
  ENTRY_SIZE,
  fillColumns,
  HIGHEST,
  LOW,
  sortByHeight,
} from '../../src/encounters/columns.js';
import { cellOf, cellsWithin, directionCells } from '../../src/encounters/direction-cells.js';
import {
  cellPartners,
  createNearPairs,
  findPairsAcross,
  findPairsOfLists,
  findPairsWithColumns,
  findPairsWithin,
  sweepOf,
} from '../../src/encounters/near-pairs.js';
import { shellFloorKm, shellOf } from '../../src/encounters/shell.js';
import { createStepBatch, evaluateSteps, FAST, FLAT, STEEP } from '../../src/encounters/step-states.js';
import { SEGMENT_SIZE } from '../../src/ephemeris/septic.js';
import { createTrackCursor } from '../../src/ephemeris/track-cursor.js';
import type { SlabTracks } from '../../src/ephemeris/tracks.js';
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
    endS: new Float64Array(count).fill(lengthS),
    toleranceKm: new Float64Array(count).fill(0.01),
    worstDefectKm: 0,
    watchedCount: 0,
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

describe('pairs of one step', () => {
  it.each([
    { halfStepS: 24, missKm: 60 },
    { halfStepS: 80, missKm: 30 },
    { halfStepS: 150, missKm: 20 },
  ])('hold every pair that comes close, half step $halfStepS s', ({ halfStepS, missKm }) => {
    const random = seededRandom(31);
    const count = 2000;
    const { states, curvature } = crowd(random, count);
    const lengthS = 2 * halfStepS + 20;
    const tracks = tracksOf(states, lengthS);
    const toleranceKm = new Float64Array(count).fill(0.05);
    const bounds = stepBounds(missKm, halfStepS, 0.05);
    const cells = directionCells(bounds.ordinaryAngle);
    const partners = cellPartners(cells, bounds);
    const batch = createStepBatch(count, 1);
    const all = Int32Array.from({ length: count }, (_, k) => k);
    evaluateSteps(
      batch,
      createTrackCursor(tracks, new Float64Array(SEGMENT_SIZE * count)),
      all,
      lengthS / 2,
      1,
      {
        cells,
        halfStepS,
        fromS: new Float64Array(count),
        toS: tracks.endS,
        curvature,
        marginKm: toleranceKm.map((tolerance) => bounds.baseReachKm / 2 + tolerance),
      },
    );
    const step = batch.steps[0];
    const kinds = [FLAT, STEEP, FAST].map((kind) => all.filter((object) => step.kind[object] === kind));
    expect(Math.min(...kinds.map((objects) => objects.length))).toBeGreaterThan(10);
    const [flat, steep, fast] = kinds;
    const filled = (objects: Int32Array, lists: typeof partners.own) => {
      const sorted = new Int32Array(objects.length);
      sortByHeight(objects, objects.length, step.low, sorted);
      const columns = createColumns(cells.count);
      fillColumns(columns, sorted, objects.length, step, lists);
      return columns;
    };
    const pairs = createNearPairs();
    const sweep = sweepOf(step, bounds, toleranceKm, pairs);
    const flatOwn = filled(flat, partners.own);
    const flatLater = filled(flat, partners.earlier);
    const steepOwn = filled(steep, partners.own);
    const steepLater = filled(steep, partners.earlier);
    findPairsWithin(sweep, flatOwn, flatLater);
    findPairsWithin(sweep, steepOwn, steepLater);
    findPairsAcross(sweep, steepOwn, flatOwn);
    findPairsAcross(sweep, steepOwn, flatLater);
    findPairsAcross(sweep, steepLater, flatOwn);
    findPairsWithColumns(sweep, fast, fast.length, flatOwn, partners.fast);
    findPairsWithColumns(sweep, fast, fast.length, steepOwn, partners.fast);
    findPairsOfLists(sweep, fast, fast.length, fast, fast.length);
    const found = new Set<string>();
    for (let k = 0; k < pairs.size; k++) found.add(`${pairs.first[k]} ${pairs.second[k]}`);
    expect(found.size, 'a pair twice').toBe(pairs.size);

    const paths = states.map((state) => pathOf(state, halfStepS));
    const missed: string[] = [];
    let close = 0;
    for (let a = 0; a < count; a++) {
      for (let b = a + 1; b < count; b++) {
        const lowest = lowestKm(paths[a], paths[b]);
        if (lowest > missKm) continue;
        close++;
        if (!found.has(`${a} ${b}`)) missed.push(`${a} ${b}: ${lowest} km`);
        expectOneMinimum(
          states[a],
          states[b],
          halfStepS,
          bounds.baseReachKm + 0.1,
          distancesOf(paths[a], paths[b]),
        );
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

describe('columns', () => {
  it('hold the objects of their cells in order of height, with the highest end so far', () => {
    const random = seededRandom(41);
    const count = 3000;
    const cells = directionCells(0.3);
    const lists = cellsWithin(cells, 0.3);
    const { steps } = createStepBatch(count, 1);
    const step = steps[0];
    for (let k = 0; k < count; k++) {
      step.cell[k] = random.integer(cells.count);
      step.low[k] = random.integer(3000);
      step.high[k] = step.low[k] + random.integer(60);
    }
    const objects = Int32Array.from({ length: count }, (_, k) => count - 1 - k);
    const sorted = new Int32Array(count);
    sortByHeight(objects, count, step.low, sorted);
    const columns = createColumns(cells.count);
    fillColumns(columns, sorted, count, step, lists);
    let wrong = 0;
    for (let cell = 0; cell < cells.count; cell++) {
      const own = lists.cells.subarray(lists.start[cell], lists.start[cell + 1]);
      const expected = [...objects].filter((object) => own.includes(step.cell[object]));
      const held: number[] = [];
      let highest = -1;
      for (let entry = columns.start[cell]; entry < columns.start[cell + 1]; entry++) {
        const at = ENTRY_SIZE * entry;
        const object = columns.entries[at];
        highest = Math.max(highest, step.high[object]);
        const ends = [...columns.entries.subarray(at + LOW, at + HIGHEST + 1)];
        const inOrder = held.length === 0 || step.low[object] >= step.low[held[held.length - 1]];
        if (!inOrder || `${ends}` !== `${[step.low[object], step.high[object], highest]}`) wrong++;
        held.push(object);
      }
      if (`${held.sort((a, b) => a - b)}` !== `${expected.sort((a, b) => a - b)}`) wrong++;
    }
    expect(wrong).toBe(0);
  });
});
