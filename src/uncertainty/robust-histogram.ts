import { MAD_TO_SIGMA, type RobustSpread } from './robust-spread.js';

/** Neighboring bins differ by this factor in magnitude: a value is known to half a percent. */
const LOG_STEP = 0.01;
const SMALLEST = 1e-3;
const LARGEST = 1e9;
const BINS_PER_SIGN = Math.ceil(Math.log(LARGEST / SMALLEST) / LOG_STEP) + 1;

/**
 * Weighted values sorted into bins of equal relative width, so that medians of any number of values take
 * memory of a fixed size. Magnitudes below 0.001 count as zero, those above 1e9 as 1e9.
 */
export type RobustHistogram = {
  /** Weights by bin: the negative values from the largest magnitude on, zero, the positive ones. */
  readonly weights: Float64Array;
};

export function emptyHistogram(): RobustHistogram {
  return { weights: new Float64Array(2 * BINS_PER_SIGN + 1) };
}

/** Adds one finite value with a weight above zero. */
export function addToHistogram(histogram: RobustHistogram, value: number, weight: number): void {
  if (!Number.isFinite(value)) throw new RangeError(`value ${value} is not a number`);
  histogram.weights[binOf(value)] += weight;
}

/**
 * Weighted median and scaled median absolute deviation of what the histogram holds, to about one percent
 * of the larger of the two.
 *
 * @returns `undefined` when it holds nothing
 */
export function histogramSpread(histogram: RobustHistogram): RobustSpread | undefined {
  const centers: number[] = [];
  const weights: number[] = [];
  histogram.weights.forEach((weight, bin) => {
    if (weight === 0) return;
    centers.push(centerOf(bin));
    weights.push(weight);
  });
  if (centers.length === 0) return undefined;
  const median = weightedMedian(centers, weights);
  const order = centers.map((_, i) => i);
  const deviations = centers.map((center) => Math.abs(center - median));
  order.sort((a, b) => deviations[a] - deviations[b] || a - b);
  const sigma =
    MAD_TO_SIGMA *
    weightedMedian(
      order.map((i) => deviations[i]),
      order.map((i) => weights[i]),
    );
  return { median, sigma };
}

function binOf(value: number): number {
  const magnitude = Math.abs(value);
  if (magnitude < SMALLEST) return BINS_PER_SIGN;
  const step = Math.min(BINS_PER_SIGN - 1, Math.floor(Math.log(magnitude / SMALLEST) / LOG_STEP));
  return value > 0 ? BINS_PER_SIGN + 1 + step : BINS_PER_SIGN - 1 - step;
}

/** Geometric middle of the bin. */
function centerOf(bin: number): number {
  if (bin === BINS_PER_SIGN) return 0;
  const step = bin > BINS_PER_SIGN ? bin - BINS_PER_SIGN - 1 : BINS_PER_SIGN - 1 - bin;
  const magnitude = SMALLEST * Math.exp((step + 0.5) * LOG_STEP);
  return bin > BINS_PER_SIGN ? magnitude : -magnitude;
}

/** First of the ascending `values` at which half of the weight is reached. */
function weightedMedian(values: readonly number[], weights: readonly number[]): number {
  const half = weights.reduce((sum, weight) => sum + weight, 0) / 2;
  let reached = 0;
  for (let i = 0; i < values.length; i++) {
    reached += weights[i];
    if (reached >= half) return values[i];
  }
  return values[values.length - 1];
}
