import { compareElements, compareSources, designatorAt, epochMsAt, type SetRecords } from './set-records.js';

/** Formats write the same epoch with different digits: two lines resolve 0.86 ms, an OMM a microsecond. */
const SAME_EPOCH_MS = 1;

/** The sets of one object, as indices into the records of its partition. */
export type ObjectHistory = {
  readonly designator: number;
  /** By epoch, one set an epoch. */
  readonly sets: readonly number[];
  /** Copies of a set in `sets`. */
  readonly copies: readonly number[];
  /** Sets with the epoch of one in `sets` but other elements. */
  readonly superseded: ReadonlyArray<{ readonly set: number; readonly by: number }>;
};

/**
 * Parts records by object, in the order of designators.
 *
 * Of sets with the same epoch one stays: of equal ones that with the first source; of unequal ones the last
 * in the order of their elements, since nothing tells which was published later and the choice must not
 * depend on the order of the files.
 */
export function* objectHistories(records: SetRecords): Generator<ObjectHistory> {
  const order = Uint32Array.from({ length: records.count }, (_, i) => i).sort(
    (a, b) =>
      designatorAt(records, a) - designatorAt(records, b) ||
      epochMsAt(records, a) - epochMsAt(records, b) ||
      compareElements(records, a, b) ||
      compareSources(records, a, b),
  );
  for (let start = 0; start < order.length; ) {
    const designator = designatorAt(records, order[start]);
    let end = start + 1;
    while (end < order.length && designatorAt(records, order[end]) === designator) end++;
    yield historyOf(records, designator, order.subarray(start, end));
    start = end;
  }
}

function historyOf(records: SetRecords, designator: number, byEpoch: Uint32Array): ObjectHistory {
  const sets: number[] = [];
  const copies: number[] = [];
  const superseded: { set: number; by: number }[] = [];
  for (let start = 0; start < byEpoch.length; ) {
    const epochMs = epochMsAt(records, byEpoch[start]);
    let end = start + 1;
    while (end < byEpoch.length && epochMsAt(records, byEpoch[end]) - epochMs <= SAME_EPOCH_MS) end++;
    const distinct: number[] = [];
    for (const set of byEpoch.subarray(start, end)) {
      if (distinct.some((other) => compareElements(records, other, set) === 0)) copies.push(set);
      else distinct.push(set);
    }
    const kept = distinct.reduce((last, set) => (compareElements(records, set, last) > 0 ? set : last));
    sets.push(kept);
    for (const set of distinct) if (set !== kept) superseded.push({ set, by: kept });
    start = end;
  }
  return { designator, sets, copies, superseded };
}
