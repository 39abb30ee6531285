import { describe, expect, test } from 'vitest';
import type { AgeBin } from '../../../src/jobs/calibrate/age-bins.js';
import { addToClass, binsOfClass, emptyClassBins } from '../../../src/jobs/calibrate/class-bins.js';
import {
  addToCoverage,
  coverageCount,
  coverageShares,
  emptyCoverage,
} from '../../../src/jobs/calibrate/coverage.js';
import {
  CLASS_DEMAND,
  errorGrowth,
  isBiased,
  OBJECT_DEMAND,
  tableAgesDays,
  tableSigmaRtnM,
} from '../../../src/jobs/calibrate/error-growth.js';
import { isHeldBack } from '../../../src/jobs/calibrate/held-back.js';
import { disjointCount, pairsOf } from '../../../src/jobs/calibrate/pairs.js';
import type { SetDifferences } from '../../../src/jobs/calibrate/set-differences.js';
import { AGE_KNOTS_DAYS } from '../../../src/uncertainty/calibrate-age-knots.js';
import { seededRandom } from '../../synthetic/random.js';

const MS_PER_DAY = 86_400_000;
const KNOTS = AGE_KNOTS_DAYS.length;
const DAY_KNOT = AGE_KNOTS_DAYS.indexOf(1);

/** Sets a day apart, each paired with the next at the knot of one day, with the given differences (same on all axes). */
function daily(values: readonly number[]): SetDifferences {
  const count = values.length + 1;
  const newer = new Int32Array(count * KNOTS).fill(-1);
  const rtnM = new Float64Array(count * KNOTS * 3);
  values.forEach((value, i) => {
    newer[i * KNOTS + DAY_KNOT] = i + 1;
    rtnM.fill(value, (i * KNOTS + DAY_KNOT) * 3, (i * KNOTS + DAY_KNOT) * 3 + 3);
  });
  return {
    sets: Array.from({ length: count }, (_, i) => i),
    rejected: [],
    epochMs: Float64Array.from({ length: count }, (_, i) => i * MS_PER_DAY),
    orbitClasses: new Int16Array(count),
    newer,
    rtnM,
    failedPairs: 0,
    jumpsM: new Float64Array(0),
  };
}

const bin = (ageDays: number, changes: Partial<AgeBin> = {}): AgeBin => ({
  samples: 200,
  disjoint: 50,
  objects: 10,
  ageDays,
  biasRtnM: [0, 0, 0],
  sigmaRtnM: [100, 300 * ageDays, 100],
  ...changes,
});

const binsAt = (ages: readonly number[], changes: Partial<AgeBin> = {}) =>
  AGE_KNOTS_DAYS.map((age) => (ages.includes(age) ? bin(age, changes) : undefined));

describe('held-back part', () => {
  test('a fifth, in blocks of fifteen days, at another phase for each object', () => {
    let heldBack = 0;
    const phases = new Set<number>();
    for (let designator = 300_000; designator < 300_100; designator++) {
      const days = Array.from({ length: 150 }, (_, day) => isHeldBack(designator, day * MS_PER_DAY));
      heldBack += days.filter(Boolean).length;
      phases.add(days.indexOf(true));
      expect(days.filter((held, day) => day % 15 !== 0 && held !== days[day - 1])).toEqual([]);
    }
    expect(heldBack).toBe((100 * 150) / 5);
    expect(phases.size).toBe(5);
    expect(isHeldBack(300_000, -1)).toBe(isHeldBack(300_000, -15 * MS_PER_DAY));
  });
});

describe('pairs', () => {
  const values = Array.from({ length: 150 }, (_, i) => i);

  test('no set of a block held back takes part in a fit', () => {
    const differences = daily(values);
    const { fitted, heldBack, intoHeldBack, acrossManeuver } = pairsOf(
      300_000,
      differences,
      new Uint32Array(151),
    );
    for (const older of fitted[DAY_KNOT]) {
      expect(isHeldBack(300_000, older * MS_PER_DAY)).toBe(false);
      expect(isHeldBack(300_000, (older + 1) * MS_PER_DAY)).toBe(false);
    }
    expect(heldBack[DAY_KNOT].every((older) => isHeldBack(300_000, older * MS_PER_DAY))).toBe(true);
    expect(heldBack[DAY_KNOT]).toHaveLength(30);
    expect(acrossManeuver).toBe(0);
    expect(fitted[DAY_KNOT].length + 30 + intoHeldBack).toBe(150);
  });

  test('none across a maneuver, and the sets it isolates are unpaired', () => {
    const stretches = Uint32Array.from({ length: 151 }, (_, i) => (i < 70 ? 0 : i === 70 ? 1 : 2));
    const { acrossManeuver, isPaired } = pairsOf(300_000, daily(values), stretches);
    expect(acrossManeuver).toBe(2);
    expect(isPaired[70]).toBe(0);
    expect(isPaired[69]).toBe(1);
  });

  test('disjoint pairs do not overlap', () => {
    const differences = daily(values);
    const threeDays = AGE_KNOTS_DAYS.indexOf(3);
    const olders = values.slice(0, 100);
    for (const older of olders) differences.newer[older * KNOTS + threeDays] = older + 3;
    expect(disjointCount(differences, olders, threeDays)).toBe(34);
    expect(disjointCount(differences, olders, DAY_KNOT)).toBe(100);
  });
});

describe('classes', () => {
  test('every object weighs the same, however many pairs it has', () => {
    const random = seededRandom(1);
    const draws = (count: number, sigma: number) =>
      daily(Array.from({ length: count }, () => random.normal(0, sigma)));
    const olders = (count: number) => Array.from({ length: count }, (_, i) => i);
    const bins = emptyClassBins(2);
    addToClass(bins, 1, draws(20_000, 1000), olders(20_000), DAY_KNOT);
    for (let object = 0; object < 9; object++) addToClass(bins, 1, draws(400, 10), olders(400), DAY_KNOT);
    const found = binsOfClass(bins, 1)[DAY_KNOT]!;
    expect(found.objects).toBe(10);
    expect(found.samples).toBe(20_000 + 9 * 400);
    expect(found.disjoint).toBe(found.samples);
    expect(found.ageDays).toBeCloseTo(1, 9);
    // Alone, the nine have 10 m; with pairs counted one by one it would be near 800 m.
    expect(found.sigmaRtnM[1]).toBeLessThan(14);
    expect(found.sigmaRtnM[1]).toBeGreaterThan(10);
    expect(binsOfClass(bins, 0).every((each) => each === undefined)).toBe(true);
  });
});

describe('growth of errors', () => {
  test('needs three ages, one of seven days or more, each with enough behind it', () => {
    expect(errorGrowth(binsAt([1, 3, 7]), OBJECT_DEMAND)?.knots.map((knot) => AGE_KNOTS_DAYS[knot])).toEqual([
      1, 3, 7,
    ]);
    expect(errorGrowth(binsAt([1, 7]), OBJECT_DEMAND)).toBeUndefined();
    expect(errorGrowth(binsAt([0.5, 1, 2, 3, 5]), OBJECT_DEMAND)).toBeUndefined();
    expect(errorGrowth(binsAt([1, 3, 7], { samples: 29 }), OBJECT_DEMAND)).toBeUndefined();
    expect(errorGrowth(binsAt([1, 3, 7], { disjoint: 9 }), OBJECT_DEMAND)).toBeUndefined();
    expect(errorGrowth(binsAt([1, 3, 7], { objects: 4 }), CLASS_DEMAND)).toBeUndefined();
    expect(errorGrowth(binsAt([1, 3, 7]), CLASS_DEMAND)).toBeDefined();
  });

  test('at the epoch a tenth of the first sigma at least, where the fit leaves nothing', () => {
    const growth = errorGrowth(binsAt([1, 3, 7, 10]), OBJECT_DEMAND)!;
    expect(tableAgesDays(growth)).toEqual([0, 1, 3, 7, 10]);
    expect(growth.laws[1].coefficients[0]).toBeLessThan(100);
    expect(tableSigmaRtnM(growth, 0)[1]).toBeCloseTo(30, 0);
    expect(tableSigmaRtnM(growth, 7)[1]).toBeCloseTo(2100, 0);
    const nothing = errorGrowth(binsAt([1, 3, 7], { sigmaRtnM: [0, 0, 0] }), OBJECT_DEMAND)!;
    expect(tableSigmaRtnM(nothing, 0)).toEqual([0.1, 0.1, 0.1]);
  });

  test('a bias counts beyond one sigma and three standard errors', () => {
    const knots = [DAY_KNOT];
    const biased = (biasM: number, disjoint: number) =>
      isBiased(binsAt([1], { biasRtnM: [0, biasM, 0], disjoint }), knots);
    expect(biased(290, 1000)).toBe(false);
    expect(biased(-310, 1000)).toBe(true);
    // 3 x 1.2533 / sqrt 10 = 1.19 sigma.
    expect(biased(340, 10)).toBe(false);
    expect(biased(370, 10)).toBe(true);
  });
});

describe('coverage', () => {
  test('counts what lies within 1, 2 and 3 sigma of the difference, not of the set', () => {
    const growth = errorGrowth(binsAt([1, 3, 7], { sigmaRtnM: [100, 100, 100] }), OBJECT_DEMAND)!;
    const coverage = emptyCoverage();
    for (const value of [50, -99, 150, -250, 350]) {
      addToCoverage(coverage, growth, DAY_KNOT, 1, [value, value / 10, value * 10]);
    }
    expect(coverageCount(coverage)).toBe(5);
    expect(coverageShares(coverage, 0)).toEqual([0.4, 0.6, 0.8]);
    expect(coverageShares(coverage, 1, DAY_KNOT)).toEqual([1, 1, 1]);
    expect(coverageShares(coverage, 2)).toEqual([0, 0, 0]);
    expect(coverageShares(coverage, 0, DAY_KNOT + 1).every(Number.isNaN)).toBe(true);
  });
});
