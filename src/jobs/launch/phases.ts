import { formatUtc } from '../../elements/utc.js';
import { InputError } from '../../input-error.js';
import { groupBy } from './group-by.js';
import type { BatchSet } from './read-batch.js';
import type { SetValidity } from './validity.js';

/** A stretch of time in which an object of the batch flies on one set; milliseconds of UTC since 1970-01-01. */
export type BatchPhase = BatchSet & {
  readonly designator: string;
  readonly releaseMs: number;
  /** Inclusive: not before release. */
  readonly validFromMs: number;
  /** Exclusive; infinite where nothing ends it. */
  readonly validToMs: number;
};

/** A stretch of the window in which no set says where an object is. */
type PhaseGap = {
  readonly designator: string;
  readonly fromMs: number;
  readonly toMs: number;
  /** Line of the table next to the gap: of the set after it, or, at the end, before it. */
  readonly line: number;
};

export type BatchPhases = {
  /** By object in the order of the files, then by time; those that begin after the window are left out. */
  readonly phases: readonly BatchPhase[];
  /** Those within the window. */
  readonly gaps: readonly PhaseGap[];
  readonly startMs: number;
  readonly endMs: number;
};

/**
 * Puts releases and validities together. The window goes from the first release for `days`.
 *
 * @param validity `undefined`: each set holds from release on
 * @param file the table of validities as the user named it, for errors
 * @throws InputError where an object has two sets at a time, or none that ever flies
 */
export function batchPhases(
  sets: readonly BatchSet[],
  releaseOf: (designator: string) => number,
  validity: readonly SetValidity[] | undefined,
  file: string | undefined,
  days: number,
): BatchPhases {
  const byObject = groupBy(sets, ({ set }) => set.designator);
  const startMs = Math.min(...[...byObject.keys()].map(releaseOf));
  const endMs = startMs + Math.round(days * 86_400_000);
  const phases: BatchPhase[] = [];
  const gaps: PhaseGap[] = [];
  for (const [designator, own] of byObject) {
    const releaseMs = releaseOf(designator);
    if (releaseMs >= endMs) {
      throw new InputError(
        `${designator} is released at ${formatUtc(releaseMs)}, after the end of the window, ${formatUtc(endMs)}: give more --days`,
      );
    }
    if (validity === undefined) {
      refuseSeveral(designator, own);
      phases.push({
        ...own[0],
        designator,
        releaseMs,
        validFromMs: releaseMs,
        validToMs: Number.POSITIVE_INFINITY,
      });
      continue;
    }
    const rows = validity
      .filter(({ batchSet }) => batchSet.set.designator === designator)
      .toSorted((a, b) => a.fromMs - b.fromMs);
    let coveredMs = releaseMs;
    for (const { batchSet, fromMs, toMs, line } of rows) {
      if (toMs <= releaseMs) {
        throw new InputError(
          `${file}:${line}: valid_until of ${designator} is ${formatUtc(toMs)}, but it is released at ${formatUtc(releaseMs)}`,
        );
      }
      if (fromMs > coveredMs && coveredMs < endMs) {
        gaps.push({ designator, fromMs: coveredMs, toMs: Math.min(fromMs, endMs), line });
      }
      coveredMs = toMs;
      if (fromMs >= endMs) continue;
      phases.push({
        ...batchSet,
        designator,
        releaseMs,
        validFromMs: Math.max(fromMs, releaseMs),
        validToMs: toMs,
      });
    }
    if (coveredMs < endMs) {
      gaps.push({ designator, fromMs: coveredMs, toMs: endMs, line: rows[rows.length - 1].line });
    }
    if (!phases.some((phase) => phase.designator === designator)) {
      throw new InputError(
        `${file}:${rows[0].line}: ${designator} has no set before the end of the window, ${formatUtc(endMs)}: give more --days, or leave it out`,
      );
    }
  }
  return { phases, gaps, startMs, endMs };
}

function refuseSeveral(designator: string, sets: readonly BatchSet[]): void {
  if (sets.length === 1) return;
  const places = sets.map(({ set: { source } }) => `${source.file}:${source.line}`);
  throw new InputError(
    `${designator} has ${sets.length} sets (${places.join(', ')}): say with --batch-validity which holds when, or name the objects apart`,
  );
}

/** What log and terminal say of the gaps: the first by file and line, and how many more. */
export function gapLine(gaps: readonly PhaseGap[], file: string | undefined): string {
  const [{ designator, fromMs, toMs, line }] = gaps;
  const hours = ((toMs - fromMs) / 3_600_000).toFixed(1);
  const others = new Set(gaps.map((gap) => gap.designator)).size - 1;
  const more = others === 0 ? '' : `; ${others} other objects have gaps too (batch-objects.csv)`;
  return `${file}:${line}: no set of ${designator} holds from ${formatUtc(fromMs)} to ${formatUtc(toMs)} (${hours} h): not screened then${more}`;
}
