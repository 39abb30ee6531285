import { pairKey } from './search-problem.js';

/** A local minimum of the distance of two objects, on true SGP4 states. */
export type ClosestApproach = {
  /** Object indices, `first` < `second`. */
  readonly first: number;
  readonly second: number;
  readonly tcaMs: number;
  /** To 1e-7 km: that of the states at `tcaMs` hangs on nothing but these. */
  readonly missKm: number;
};

/** Two minima of one pair cannot be this close: they are one, found by two steps or two slabs. */
const SAME_MS = 1;

/** Puts approaches in order (TCA, then objects) and drops those that two steps or two slabs both found. */
export function distinctApproaches(
  approaches: readonly ClosestApproach[],
  objectCount: number,
): ClosestApproach[] {
  const sorted = [...approaches].sort(
    (a, b) => a.tcaMs - b.tcaMs || a.first - b.first || a.second - b.second,
  );
  const lastTcaMs = new Map<number, number>();
  return sorted.filter(({ first, second, tcaMs }) => {
    const key = pairKey(first, second, objectCount);
    const before = lastTcaMs.get(key);
    lastTcaMs.set(key, tcaMs);
    return before === undefined || tcaMs - before > SAME_MS;
  });
}
