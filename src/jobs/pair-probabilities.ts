import { type EncounterRecords, FIELD, FIELDS } from './encounter-records.js';

/** Stands where no pair has its place yet. */
const FREE = -1;

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
  { data, size }: EncounterRecords,
  objectCount: number,
  identities?: ArrayLike<number>,
): void {
  // A hash table in flat arrays, half empty at least: a Map takes about three times as long.
  const bits = Math.max(4, Math.ceil(Math.log2(2 * size)));
  const pairs = new Float64Array(2 ** bits).fill(FREE);
  const totals = new Float64Array(2 ** bits).fill(Number.NaN);
  const placeOf = new Uint32Array(size);
  for (let k = 0; k < size; k++) {
    const at = FIELDS * k;
    const first = identities?.[data[at + FIELD.first]] ?? data[at + FIELD.first];
    const second = identities?.[data[at + FIELD.second]] ?? data[at + FIELD.second];
    const pair = first * objectCount + second;
    let place = (Math.imul(first, 0x9e3779b1) + Math.imul(second, 0x85ebca6b)) >>> (32 - bits);
    while (pairs[place] !== pair && pairs[place] !== FREE) place = (place + 1) % pairs.length;
    pairs[place] = pair;
    placeOf[k] = place;
    const probability = data[at + FIELD.probability];
    if (Number.isNaN(probability)) continue;
    // Only sums of positive terms: nothing cancels, however small, and one encounter is exactly itself.
    const before = Number.isNaN(totals[place]) ? 0 : totals[place];
    totals[place] = before + probability * (1 - before);
  }
  for (let k = 0; k < size; k++) data[FIELDS * k + FIELD.pairProbability] = totals[placeOf[k]];
}
