import { medianOf, robustSpread, smallSampleFactor } from '../../uncertainty/robust-spread.js';
import type { Vector3 } from '../../vector.js';
import { disjointCount, pairAgeDays, pairDifferenceM } from './pairs.js';
import type { SetDifferences } from './set-differences.js';

/** What the differences around one age knot look like. */
export type AgeBin = {
  readonly samples: number;
  /** Samples that do not overlap in time. */
  readonly disjoint: number;
  /** Objects that the samples come from. */
  readonly objects: number;
  /** Middle of the ages. */
  readonly ageDays: number;
  /** Median of older minus newer, R T N, meters: the bias. */
  readonly biasRtnM: Vector3;
  /** Robust sigma of the differences about it, R T N, meters. */
  readonly sigmaRtnM: Vector3;
};

/**
 * Robust statistics of the pairs of one object at one age knot; `undefined` for fewer than two disjoint pairs.
 *
 * @param olders positions of the older sets, ascending
 */
export function objectBin(
  differences: SetDifferences,
  olders: readonly number[],
  knot: number,
): AgeBin | undefined {
  const disjoint = disjointCount(differences, olders, knot);
  if (disjoint < 2) return undefined;
  const axes = [0, 1, 2].map((axis) =>
    robustSpread(Float64Array.from(olders, (older) => pairDifferenceM(differences, older, knot, axis))),
  );
  const factor = smallSampleFactor(disjoint);
  return {
    samples: olders.length,
    disjoint,
    objects: 1,
    ageDays: medianOf(Float64Array.from(olders, (older) => pairAgeDays(differences, older, knot))),
    biasRtnM: [axes[0].median, axes[1].median, axes[2].median],
    sigmaRtnM: [axes[0].sigma * factor, axes[1].sigma * factor, axes[2].sigma * factor],
  };
}
