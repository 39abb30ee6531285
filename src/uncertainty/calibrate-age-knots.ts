/**
 * Ages at which errors are measured and the table has its rows, days. They are closest where errors grow
 * out of the noise of the epoch, put the usual screening window of seven days inside, and end at 30 days,
 * past which hardly anybody screens. No older than that are pairs formed at all.
 */
export const AGE_KNOTS_DAYS: readonly number[] = [0.25, 0.5, 1, 2, 3, 5, 7, 10, 14, 21, 30];

/**
 * A pair serves a knot when its age is within this fraction of it: wide enough that sets published every
 * few days find a partner, narrow enough that growth inside the window stays small beside the spread.
 */
const KNOT_WINDOW = 0.2;

/**
 * Ages that count for the knot of this index: `[fromDays, toDays)`. Windows do not overlap: where two
 * would, the geometric mean of their knots parts them.
 */
export function knotWindow(knot: number): { readonly fromDays: number; readonly toDays: number } {
  const age = AGE_KNOTS_DAYS[knot];
  if (age === undefined) throw new RangeError(`no age knot ${knot}`);
  const before = AGE_KNOTS_DAYS[knot - 1] ?? 0;
  const after = AGE_KNOTS_DAYS[knot + 1] ?? Number.POSITIVE_INFINITY;
  return {
    fromDays: Math.max(age * (1 - KNOT_WINDOW), Math.sqrt(age * before)),
    toDays: Math.min(age * (1 + KNOT_WINDOW), Math.sqrt(age * after)),
  };
}
