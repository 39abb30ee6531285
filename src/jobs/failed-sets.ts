import type { ElementSet, UnusedElements } from '../elements/element-set.js';
import { formatUtc } from '../elements/utc.js';
import { recordStateAt } from '../ephemeris/record-states.js';
import type { JobPorts } from './screen-options.js';
import type { ScreenedObject } from './screened-object.js';
import type { SearchOutcome } from './search-in-workers.js';

/** Rows of `unused-elements.csv` for the sets that SGP4 gave up on before the end of the window. */
export function failedSets(
  outcome: SearchOutcome,
  objects: readonly ScreenedObject[],
  startMs: number,
  endMs: number,
): UnusedElements[] {
  const state = new Float64Array(6);
  return [...outcome.lastMsOf]
    .sort(([a], [b]) => a - b)
    .map(([index, lastMs]) => {
      const { set, designator, records, place, validFromMs } = objects[index];
      const unused = { source: set.source, designator, reason: 'failed' } as const;
      const fromMs = Math.max(startMs, validFromMs);
      if (!recordStateAt(records, place, fromMs, state)) {
        const detail = `SGP4 gives no state at ${formatUtc(fromMs)}, where its screening starts (decayed before, or elements too old): not screened`;
        return { ...unused, detail };
      }
      const detail = `SGP4 gives no state after ${formatUtc(lastMs)} (decayed, or elements too old): screened up to there, not to ${formatUtc(endMs)}`;
      return { ...unused, detail, failedAtMs: lastMs };
    });
}

/** A satellite of one's own that is not screened to the end is no matter for a list alone. */
export function warnOfFailures(
  failed: readonly UnusedElements[],
  fleet: readonly ElementSet[],
  ports: Pick<JobPorts, 'log'>,
): void {
  const own = new Map(fleet.map((set) => [set.source, set.name]));
  for (const { source, designator, detail } of failed) {
    const name = own.get(source);
    if (name !== undefined) ports.log.warn(`fleet, ${`${designator} ${name}`.trim()}: ${detail}`);
  }
}

/** What the terminal says of them. */
export function failedLines(count: number): string[] {
  if (count === 0) return [];
  return [
    `${count} of the used sets ${count === 1 ? 'fails' : 'fail'} before the end of the window (decayed, or elements too old): see unused-elements.csv`,
  ];
}
