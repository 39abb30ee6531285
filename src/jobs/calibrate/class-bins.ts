import { AGE_KNOTS_DAYS } from '../../uncertainty/calibrate-age-knots.js';
import {
  addToHistogram,
  emptyHistogram,
  histogramSpread,
  type RobustHistogram,
} from '../../uncertainty/robust-histogram.js';
import type { AgeBin } from './age-bins.js';
import { disjointCount, pairAgeDays, pairDifferenceM } from './pairs.js';
import type { SetDifferences } from './set-differences.js';

type ClassBin = {
  samples: number;
  disjoint: number;
  objects: number;
  ageSumDays: number;
  readonly axes: readonly [RobustHistogram, RobustHistogram, RobustHistogram];
};

/** Differences of whole orbit classes by age knot, in histograms: 130 kB a class and knot, however many there are. */
export type ClassBins = { readonly bins: Array<Array<ClassBin | undefined>> };

export function emptyClassBins(classCount: number): ClassBins {
  return { bins: Array.from({ length: classCount }, () => AGE_KNOTS_DAYS.map(() => undefined)) };
}

/**
 * Adds the pairs that one object has in one class at one knot. Every object weighs the same, however many
 * pairs it has: the class stands for an object that nothing else is known about, not for those published
 * most often.
 *
 * @param olders positions of the older sets, ascending, at least one
 */
export function addToClass(
  classBins: ClassBins,
  orbitClass: number,
  differences: SetDifferences,
  olders: readonly number[],
  knot: number,
): void {
  classBins.bins[orbitClass][knot] ??= {
    samples: 0,
    disjoint: 0,
    objects: 0,
    ageSumDays: 0,
    axes: [emptyHistogram(), emptyHistogram(), emptyHistogram()],
  };
  const bin = classBins.bins[orbitClass][knot];
  bin.samples += olders.length;
  bin.disjoint += disjointCount(differences, olders, knot);
  bin.objects++;
  const weight = 1 / olders.length;
  for (const older of olders) {
    bin.ageSumDays += pairAgeDays(differences, older, knot) * weight;
    bin.axes.forEach((histogram, axis) => {
      addToHistogram(histogram, pairDifferenceM(differences, older, knot, axis), weight);
    });
  }
}

/** The statistics of a class, by age knot; `undefined` where it has no pairs. */
export function binsOfClass(classBins: ClassBins, orbitClass: number): Array<AgeBin | undefined> {
  return classBins.bins[orbitClass].map((bin) => {
    if (bin === undefined) return undefined;
    const [radial, transverse, normal] = bin.axes.map((histogram) => histogramSpread(histogram)!);
    return {
      samples: bin.samples,
      disjoint: bin.disjoint,
      objects: bin.objects,
      ageDays: bin.ageSumDays / bin.objects,
      biasRtnM: [radial.median, transverse.median, normal.median],
      sigmaRtnM: [radial.sigma, transverse.sigma, normal.sigma],
    };
  });
}
