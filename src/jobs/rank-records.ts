import { compareDesignators } from '../tables/compare-designators.js';
import { type EncounterRecords, FIELD, FIELDS } from './encounter-records.js';

/** Above the negative of every probability. */
const BEHIND_ALL = 1;

/** Which of the two words of a double holds its lowest digits. */
const LOW_WORD = new Uint8Array(Uint32Array.of(1).buffer)[0] === 1 ? 0 : 1;

/**
 * The order of all tables: collision probability from high to low, then miss distance, time of closest
 * approach, designator of object 1 and of object 2 from low to high.
 *
 * An encounter without a probability comes after all that have one, closest first: any probability put
 * in its place would be made up. The terminal table shows those apart, so that none hides at the end.
 *
 * @returns record numbers from the first rank to the last
 */
export function rankRecords(
  { data, size }: EncounterRecords,
  objects: readonly { readonly designator: string }[],
): Uint32Array {
  const figure = (field: number) => (number: number) => data[FIELDS * number + field];
  const probability = figure(FIELD.probability);
  const improbability = (number: number) => {
    const value = probability(number);
    return Number.isNaN(value) ? BEHIND_ALL : 0 - value;
  };
  const designator = (number: number, field: number) => objects[data[FIELDS * number + field]].designator;
  const byDesignators = (a: number, b: number) =>
    compareDesignators(designator(a, FIELD.first), designator(b, FIELD.first)) ||
    compareDesignators(designator(a, FIELD.second), designator(b, FIELD.second));
  const order = new Uint32Array(size).map((_, number) => number);
  sortByKey(order, improbability, (alike) =>
    sortByKey(alike, figure(FIELD.missKm), (asNear) =>
      sortByKey(asNear, figure(FIELD.tcaMs), (atOnce) => atOnce.sort(byDesignators)),
    ),
  );
  return order;
}

/**
 * Puts numbers in the order of their keys from low to high, and numbers of equal keys in that of `sortEqual`.
 *
 * A sort that calls a comparison takes three times as long as this one: each key carries in its lowest 32
 * bits whose it is, so that doubles are sorted by themselves, and only those that are alike to a millionth
 * are compared.
 *
 * @param keyOf finite, never -0
 */
function sortByKey(
  numbers: Uint32Array,
  keyOf: (number: number) => number,
  sortEqual: (equal: Uint32Array) => void,
): void {
  const unsorted = numbers.slice();
  const keys = new Float64Array(numbers.length);
  for (let i = 0; i < keys.length; i++) keys[i] = keyOf(unsorted[i]);
  const signed = keys.slice();
  const words = new Uint32Array(signed.buffer);
  for (let i = 0; i < keys.length; i++) words[2 * i + LOW_WORD] = i;
  signed.sort();
  const places = new Uint32Array(keys.length);
  for (let i = 0; i < keys.length; i++) places[i] = words[2 * i + LOW_WORD];
  forEachRun(
    places.length,
    (i) => words[2 * i + 1 - LOW_WORD],
    (from, to) => places.subarray(from, to).sort((a, b) => keys[a] - keys[b] || a - b),
  );
  for (let i = 0; i < keys.length; i++) numbers[i] = unsorted[places[i]];
  forEachRun(
    places.length,
    (i) => keys[places[i]],
    (from, to) => sortEqual(numbers.subarray(from, to)),
  );
}

/** Visits, from `from` to before `to`, where several in a row have the same figure. */
function forEachRun(
  length: number,
  figureAt: (index: number) => number,
  visit: (from: number, to: number) => void,
): void {
  for (let from = 0, to = 1; from < length; from = to++) {
    while (to < length && figureAt(to) === figureAt(from)) to++;
    if (to - from > 1) visit(from, to);
  }
}
