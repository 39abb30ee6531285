/**
 * Takes the median absolute deviation of a Gaussian to its standard deviation: 1 / (upper quartile of the
 * standard normal distribution).
 */
export const MAD_TO_SIGMA = 1.482602218505602;

export type RobustSpread = {
  readonly median: number;
  /** 1.4826 times the median absolute deviation from the median. */
  readonly sigma: number;
};

/**
 * Median and scaled median absolute deviation: half of the values may lie anywhere and still cannot carry
 * the result away (Rousseeuw and Croux, "Alternatives to the Median Absolute Deviation", JASA 88, 1993).
 *
 * @param values finite, at least one; left as they are
 */
export function robustSpread(values: Float64Array): RobustSpread {
  if (values.length === 0) throw new RangeError('no values to take a median of');
  const sorted = values.slice().sort();
  const median = medianOfSorted(sorted);
  for (let i = 0; i < sorted.length; i++) sorted[i] = Math.abs(sorted[i] - median);
  return { median, sigma: MAD_TO_SIGMA * medianOfSorted(sorted.sort()) };
}

/** Median of finite values, at least one; left as they are. */
export function medianOf(values: Float64Array): number {
  if (values.length === 0) throw new RangeError('no values to take a median of');
  return medianOfSorted(values.slice().sort());
}

/**
 * What `sigma` of `robustSpread` must be multiplied by so that it is right on average for few independent
 * values: n / (n - 0.8), good for n > 9 (Croux and Rousseeuw, "Time-efficient algorithms for two highly
 * robust estimators of scale", COMPSTAT 1992; from memory, checked by simulation in the tests).
 *
 * @param independent how many independent values the sigma came from, at least 2
 */
export function smallSampleFactor(independent: number): number {
  if (!(independent >= 2)) throw new RangeError(`${independent} values carry no spread`);
  return independent / (independent - 0.8);
}

function medianOfSorted(sorted: Float64Array): number {
  const middle = sorted.length >> 1;
  return sorted.length % 2 === 1 ? sorted[middle] : (sorted[middle - 1] + sorted[middle]) / 2;
}
