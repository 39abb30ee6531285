import {
  batchDesignatorOfName,
  batchDesignatorOfPlace,
  isBatchDesignator,
} from '../../elements/batch-designator.js';
import { countFiles } from '../../elements/count-files.js';
import type { ElementSet, FileCount, UnusedElements } from '../../elements/element-set.js';
import { readElementFiles } from '../../elements/read.js';
import { formatUtc } from '../../elements/utc.js';
import { InputError } from '../../input-error.js';

/** One element set of the batch. */
export type BatchSet = {
  /** With the designator of the batch in place of whatever number stood there. */
  readonly set: ElementSet;
  /** Catalog number as it stood in the file, `''` for none or zero. */
  readonly numberInFile: string;
};

export type Batch = {
  readonly sets: readonly BatchSet[];
  readonly rejected: readonly UnusedElements[];
  readonly files: readonly FileCount[];
  /** What the user should know about names that stand for several objects. */
  readonly warnings: readonly string[];
};

/**
 * Reads the element sets of a launch batch. Every set is an object of its own, or another phase of the object
 * of that name in another file; catalog numbers tell nothing apart, since before cataloging they are blank,
 * zero, all alike or somebody else's.
 *
 * @throws InputError where a file cannot be used, or objects cannot be told apart
 */
export async function readBatch(paths: readonly string[]): Promise<Batch> {
  const read = await readElementFiles(paths, { batch: true });
  const warnings: string[] = [];
  const sets = paths.flatMap((path) => {
    const own = read.sets.filter(({ source }) => source.file === path);
    const lines = [...own, ...read.rejected.filter(({ source }) => source.file === path)]
      .map(({ source }) => source.line)
      .sort((a, b) => a - b);
    return withDesignators(own, lines, paths.length > 1, warnings);
  });
  const files = countFiles(read.files, { fleet: sets.map(({ set }) => set), catalog: [], superseded: [] });
  return { sets, rejected: read.rejected, files, warnings };
}

/**
 * @param lines first lines of all sets of the file, rejected ones too: a set that is mended later moves no other
 */
function withDesignators(
  sets: readonly ElementSet[],
  lines: readonly number[],
  isOneOfSeveral: boolean,
  warnings: string[],
): BatchSet[] {
  const before = new Map<string, ElementSet[]>();
  return sets.map((set) => {
    const first = batchDesignatorOfName(set.name);
    const place = `${set.source.file}:${set.source.line}`;
    if (first === undefined && isOneOfSeveral) {
      throw new InputError(
        `${place}: a set without a name, but --batch names several files, whose objects are matched by name: give every set a name line`,
      );
    }
    const same = before.get(first ?? '') ?? [];
    before.set(first ?? '', [...same, set]);
    const designator =
      first === undefined
        ? batchDesignatorOfPlace(lines.indexOf(set.source.line) + 1)
        : (batchDesignatorOfName(set.name, same.length + 1) as string);
    if (first !== undefined && same.length > 0) {
      warnings.push(
        `${place}: the name ${JSON.stringify(set.name)} is that of line ${same[0].source.line} too: screened as an object of its own, ${designator}; name them apart if you can`,
      );
    }
    return { set: { ...set, designator }, numberInFile: set.designator };
  });
}

/**
 * Finds the one object that a row of a table speaks of.
 *
 * @param object its designator, or its name as in the element sets
 * @param where file and line of the row, for errors
 * @throws InputError where there is none, or several have the name
 */
export function objectNamed(object: string, sets: readonly BatchSet[], where: string): BatchSet {
  const exact = sets.find(({ set }) => set.designator === object);
  if (exact !== undefined) return exact;
  const named = isBatchDesignator(object) ? [] : sets.filter(({ set }) => hasName(set, object));
  if (named.length === 1) return named[0];
  if (named.length === 0) {
    throw new InputError(
      `${where}: ${JSON.stringify(object)} is neither name nor designator of a set of the batch: check the spelling`,
    );
  }
  throw new InputError(
    `${where}: ${JSON.stringify(object)} is the name of ${named.length} sets: give a designator, ${named.map(({ set }) => set.designator).join(' or ')}`,
  );
}

function hasName(set: ElementSet, name: string): boolean {
  const wanted = batchDesignatorOfName(name);
  return wanted !== undefined && batchDesignatorOfName(set.name) === wanted;
}

/**
 * Stops a run whose release does not fit its elements.
 *
 * @param fromMs when each set begins to hold
 * @throws InputError that names the first set that is too far off
 */
export function expectBatchNear(
  phases: readonly { readonly set: ElementSet; readonly validFromMs: number }[],
  maxAgeDays: number,
): void {
  for (const { set, validFromMs } of phases) {
    const days = Math.abs(validFromMs - set.epochMs) / 86_400_000;
    if (days <= maxAgeDays) continue;
    throw new InputError(
      `${set.source.file}:${set.source.line}: the epoch of ${set.designator} is ${formatUtc(set.epochMs)}, ${days.toFixed(1)} days from ${formatUtc(validFromMs)}, when it begins to hold: give the release that fits the elements (the limit is --max-age-days ${maxAgeDays})`,
    );
  }
}
