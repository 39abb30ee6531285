import { summarizeAges } from '../elements/age.js';
import type { ElementSet } from '../elements/element-set.js';
import { type ElementAges, elementAgesOf } from './run-record.js';
import type { JobPorts } from './screen-options.js';

const MS_PER_DAY = 86_400_000;

/**
 * Says in the log which groups hold elements older than the limit.
 *
 * @param groups by the word that the log calls them, such as `catalog`
 */
export function warnOfOldElements(
  groups: Readonly<Record<string, readonly ElementSet[]>>,
  startMs: number,
  maxAgeDays: number,
  ports: Pick<JobPorts, 'log'>,
): void {
  for (const [group, sets] of Object.entries(groups)) {
    const ages = summarizeAges(sets, startMs, maxAgeDays);
    if (ages === undefined || ages.beyondLimit === 0) continue;
    ports.log.warn(
      `${ages.beyondLimit} of ${ages.count} ${group} element sets are further than ${maxAgeDays} days from the start; the worst is ${ages.worst.designator} with ${ages.worstDays.toFixed(1)} days. They are screened, and their rows say old-elements: get fresher sets`,
    );
  }
}

/** Age of each set at a time, days. */
export function agesAt(
  sets: readonly ElementSet[],
  startMs: number,
): { readonly designator: string; readonly ageDays: number }[] {
  return sets.map(({ designator, epochMs }) => ({ designator, ageDays: (startMs - epochMs) / MS_PER_DAY }));
}

/** What `run.json` says of the ages of a group. */
export function agesOf(sets: readonly ElementSet[], startMs: number): ElementAges {
  return elementAgesOf(agesAt(sets, startMs));
}
