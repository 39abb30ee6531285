import { AGE_KNOTS_DAYS } from '../../uncertainty/calibrate-age-knots.js';
import { fitGrowthLaw, type GrowthLaw, setSigmaM } from '../../uncertainty/calibrate-growth-law.js';
import type { Vector3 } from '../../vector.js';
import type { AgeBin } from './age-bins.js';

/** How much there must be behind a growth law. */
type Demand = {
  readonly minSamples: number;
  readonly minDisjoint: number;
  readonly minObjects: number;
};

/**
 * For an object: a scaled MAD of 30 independent samples is within 21 percent (1.166 / sqrt 30); 10 disjoint
 * pairs are what the small-sample factor is good for.
 */
export const OBJECT_DEMAND: Demand = { minSamples: 30, minDisjoint: 10, minObjects: 1 };
/** For a class also enough objects that no single one makes it. */
export const CLASS_DEMAND: Demand = { minSamples: 100, minDisjoint: 30, minObjects: 5 };
/** Fewer knots do not show a growth. */
export const MIN_KNOTS = 3;
/** Screening looks seven days ahead (common practice): a law that ends before says nothing about it. */
export const MIN_REACH_DAYS = 7;
/** A bias beyond so many sigmas is not what a sigma can stand for. */
export const BIAS_SIGMAS = 1;
/** The standard error of a median is 1.2533 sigma / sqrt n; so many of them make a bias believable. */
const BIAS_STANDARD_ERRORS = 3 * 1.2533;
/** At the epoch no less than this part of the sigma at the first knot: the fit knows least where no pair lies. */
const SMALLEST_EPOCH_PART = 0.1;
/** The table's last digit, meters. */
const SMALLEST_SIGMA_M = 0.1;

/** Growth of the differences in R, T and N, and the knots that it rests on. */
export type ErrorGrowth = {
  readonly laws: readonly [GrowthLaw, GrowthLaw, GrowthLaw];
  readonly knots: readonly number[];
};

/** Fits the growth laws to the bins that meet the demand; `undefined` when these are too few or end too early. */
export function errorGrowth(
  bins: ReadonlyArray<AgeBin | undefined>,
  demand: Demand,
): ErrorGrowth | undefined {
  const knots = AGE_KNOTS_DAYS.map((_, knot) => knot).filter((knot) => meets(bins[knot], demand));
  if (knots.length < MIN_KNOTS || AGE_KNOTS_DAYS[knots.at(-1)!] < MIN_REACH_DAYS) return undefined;
  const law = (axis: number) =>
    fitGrowthLaw(
      knots.map((knot) => {
        const { ageDays, sigmaRtnM, disjoint } = bins[knot]!;
        return { ageDays, sigmaM: sigmaRtnM[axis], weight: disjoint };
      }),
    );
  return { laws: [law(0), law(1), law(2)], knots };
}

/** Whether a bias at one of the knots is so large that a sigma about zero would not cover it. */
export function isBiased(bins: ReadonlyArray<AgeBin | undefined>, knots: readonly number[]): boolean {
  return knots.some((knot) => {
    const { biasRtnM, sigmaRtnM, disjoint } = bins[knot]!;
    const sigmas = Math.max(BIAS_SIGMAS, BIAS_STANDARD_ERRORS / Math.sqrt(disjoint));
    return biasRtnM.some((bias, axis) => Math.abs(bias) > sigmas * sigmaRtnM[axis]);
  });
}

/** Whether the law was fitted to ages up to this knot. */
export function reaches(growth: ErrorGrowth, knot: number): boolean {
  return knot <= growth.knots.at(-1)!;
}

/** Ages of the rows of the table, days: the epoch and the knots that were measured. */
export function tableAgesDays(growth: ErrorGrowth): number[] {
  return [0, ...growth.knots.map((knot) => AGE_KNOTS_DAYS[knot])];
}

/** One-sigma of a single set at one of the ages of the table, R T N, meters, common errors left aside. */
export function tableSigmaRtnM(growth: ErrorGrowth, ageDays: number): Vector3 {
  const firstKnotDays = AGE_KNOTS_DAYS[growth.knots[0]];
  const [radial, transverse, normal] = growth.laws.map((law) =>
    Math.max(setSigmaM(law, ageDays), SMALLEST_EPOCH_PART * setSigmaM(law, firstKnotDays), SMALLEST_SIGMA_M),
  );
  return [radial, transverse, normal];
}

function meets(bin: AgeBin | undefined, demand: Demand): boolean {
  return (
    bin !== undefined &&
    bin.samples >= demand.minSamples &&
    bin.disjoint >= demand.minDisjoint &&
    bin.objects >= demand.minObjects
  );
}
