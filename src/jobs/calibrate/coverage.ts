import { AGE_KNOTS_DAYS } from '../../uncertainty/calibrate-age-knots.js';
import { differenceSigmaM } from '../../uncertainty/calibrate-growth-law.js';
import type { ErrorGrowth } from './error-growth.js';

/** Shares of a Gaussian within 1, 2 and 3 sigma. */
export const GAUSSIAN_SHARES: readonly number[] = [0.682689492, 0.954499736, 0.997300204];
const AXES = 3;
const LEVELS = GAUSSIAN_SHARES.length;

/** How many held-back differences lie within 1, 2 and 3 sigma, by age knot and axis. */
export type Coverage = {
  readonly counts: Float64Array;
  /** At [(knot x 3 + axis) x 3 + level]. */
  readonly within: Float64Array;
};

export function emptyCoverage(): Coverage {
  return {
    counts: new Float64Array(AGE_KNOTS_DAYS.length),
    within: new Float64Array(AGE_KNOTS_DAYS.length * AXES * LEVELS),
  };
}

/**
 * Counts one held-back difference against the sigma that the fit expects of it: about zero, as a screening
 * uses the table, a bias included.
 *
 * @param differenceRtnM R, T, N
 */
export function addToCoverage(
  coverage: Coverage,
  growth: ErrorGrowth,
  knot: number,
  ageDays: number,
  differenceRtnM: ArrayLike<number>,
): void {
  coverage.counts[knot]++;
  for (let axis = 0; axis < AXES; axis++) {
    const sigmas = Math.abs(differenceRtnM[axis]) / differenceSigmaM(growth.laws[axis], ageDays);
    for (let level = 0; level < LEVELS; level++) {
      if (sigmas <= level + 1) coverage.within[(knot * AXES + axis) * LEVELS + level]++;
    }
  }
}

/** The sum of several coverages. */
export function sumOfCoverages(coverages: readonly Coverage[]): Coverage {
  const sum = emptyCoverage();
  for (const { counts, within } of coverages) {
    counts.forEach((count, i) => {
      sum.counts[i] += count;
    });
    within.forEach((count, i) => {
      sum.within[i] += count;
    });
  }
  return sum;
}

/** Number of differences, over all knots or at one. */
export function coverageCount(coverage: Coverage, knot?: number): number {
  return knot === undefined ? coverage.counts.reduce((sum, count) => sum + count, 0) : coverage.counts[knot];
}

/** Shares within 1, 2 and 3 sigma along an axis, over all knots or at one; NaN where there is no difference. */
export function coverageShares(coverage: Coverage, axis: number, knot?: number): number[] {
  const knots = knot === undefined ? AGE_KNOTS_DAYS.map((_, i) => i) : [knot];
  return GAUSSIAN_SHARES.map(
    (_, level) =>
      knots.reduce((sum, k) => sum + coverage.within[(k * AXES + axis) * LEVELS + level], 0) /
      coverageCount(coverage, knot),
  );
}
