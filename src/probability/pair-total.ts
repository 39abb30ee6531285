import { shown } from './arguments.js';

/**
 * Probability that at least one of several encounters of a pair ends in a collision, the encounters taken
 * as independent: 1 - (1 - p1)(1 - p2)..., exact to the last digits also for tiny probabilities.
 *
 * Encounters of one pair share most of their position error, so this errs on the high side.
 *
 * @param probabilities of the single encounters; `undefined` where one has no figure
 * @returns `undefined` where none has a figure; encounters without one count as nothing
 * @throws RangeError for a figure that is no probability
 */
export function pairTotal(probabilities: Iterable<number | undefined>): number | undefined {
  let total: number | undefined;
  for (const probability of probabilities) {
    if (probability === undefined) continue;
    if (!(probability >= 0 && probability <= 1)) {
      throw new RangeError(`a probability must be from 0 to 1, got ${shown(probability)}`);
    }
    // Only sums of positive terms: nothing cancels, however small, and one encounter is exactly itself.
    total = total === undefined ? probability : total + probability * (1 - total);
  }
  return total;
}
