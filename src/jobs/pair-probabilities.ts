import { type EncounterRecords, FIELD, FIELDS } from './encounter-records.js';

/**
 * Puts the total of each pair over its encounters in the window into every one of its records: the
 * probability that at least one of them ends in a collision, the encounters taken as independent,
 * 1 - (1 - p1)(1 - p2)..., exact to the last digits also for tiny probabilities. Encounters without a figure
 * count as nothing; where none has one, the total is NaN.
 *
 * Encounters of one pair share most of their position error, so this errs on the high side.
 *
 * @param identities which object each index stands for, where several stand for one in turn
 */
export function fillPairProbabilities(
  records: EncounterRecords,
  objectCount: number,
  identities?: ArrayLike<number>,
): void {
  const { data, size } = records;
  const totals = new Map<number, number>();
  const identity = (index: number) => identities?.[index] ?? index;
  const keyAt = (at: number) =>
    identity(data[at + FIELD.first]) * objectCount + identity(data[at + FIELD.second]);
  for (let at = 0; at < FIELDS * size; at += FIELDS) {
    const probability = data[at + FIELD.probability];
    if (Number.isNaN(probability)) continue;
    // Only sums of positive terms: nothing cancels, however small, and one encounter is exactly itself.
    const before = totals.get(keyAt(at)) ?? 0;
    totals.set(keyAt(at), before + probability * (1 - before));
  }
  for (let at = 0; at < FIELDS * size; at += FIELDS) {
    data[at + FIELD.pairProbability] = totals.get(keyAt(at)) ?? Number.NaN;
  }
}
