import { InputError } from '../input-error.js';
import type { ElementSet } from './element-set.js';
import { formatUtc } from './utc.js';

const MS_PER_DAY = 86_400_000;

/** Elements further than this from the time they are used for say little in low orbit (common practice). */
export const DEFAULT_AGE_LIMIT_DAYS = 30;

/** Age is start minus epoch, in days; negative where the epoch lies after the start. */
export type AgeSummary = {
  readonly count: number;
  readonly medianDays: number;
  /** Of the set whose epoch is furthest from the start, before or after. */
  readonly worstDays: number;
  readonly worst: ElementSet;
  /** Sets whose epoch is more than the limit from the start, before or after. */
  readonly beyondLimit: number;
  readonly limitDays: number;
};

/** Age of a set at a time in milliseconds of UTC since 1970-01-01, in days. */
export function ageDays(set: Pick<ElementSet, 'epochMs'>, timeMs: number): number {
  return (timeMs - set.epochMs) / MS_PER_DAY;
}

/**
 * How old element sets are at the start of a window.
 *
 * @param startMs milliseconds of UTC since 1970-01-01
 * @returns `undefined` for no sets at all
 */
export function summarizeAges(
  sets: readonly ElementSet[],
  startMs: number,
  limitDays: number = DEFAULT_AGE_LIMIT_DAYS,
): AgeSummary | undefined {
  if (!Number.isFinite(startMs)) throw new RangeError(`startMs is ${startMs}, expected a finite number`);
  if (!(limitDays >= 0)) throw new RangeError(`limitDays is ${limitDays}, expected 0 or more`);
  if (sets.length === 0) return undefined;
  const ages = sets.map((set) => ageDays(set, startMs));
  let worstIndex = 0;
  let beyondLimit = 0;
  for (const [i, age] of ages.entries()) {
    if (Math.abs(age) > Math.abs(ages[worstIndex])) worstIndex = i;
    if (Math.abs(age) > limitDays) beyondLimit += 1;
  }
  return {
    count: sets.length,
    medianDays: median(ages),
    worstDays: ages[worstIndex],
    worst: sets[worstIndex],
    beyondLimit,
    limitDays,
  };
}

/**
 * Stops a run whose start does not fit its elements: with the epochs of most of the fleet further from the
 * start than the limit, no figure would mean anything.
 *
 * @param startMs milliseconds of UTC since 1970-01-01
 * @throws InputError that names the median epoch and what to do
 */
export function expectCurrentFleet(
  fleet: readonly ElementSet[],
  startMs: number,
  limitDays: number = DEFAULT_AGE_LIMIT_DAYS,
): void {
  const ages = summarizeAges(fleet, startMs, limitDays);
  if (ages === undefined || ages.beyondLimit * 2 <= ages.count) return;
  const medianEpoch = formatUtc(startMs - ages.medianDays * MS_PER_DAY);
  throw new InputError(
    `${ages.beyondLimit} of ${ages.count} fleet element sets have their epoch more than ${limitDays} days from the start ${formatUtc(startMs)} (median epoch ${medianEpoch}): give --start near that epoch, or newer element sets`,
  );
}

function median(values: readonly number[]): number {
  const sorted = Float64Array.from(values).sort();
  const middle = sorted.length >> 1;
  return sorted.length % 2 === 1 ? sorted[middle] : (sorted[middle - 1] + sorted[middle]) / 2;
}
