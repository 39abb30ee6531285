import type { ElementSet, UnusedElements } from '../../elements/element-set.js';
import { emptyTally, type FileTally } from './history-counts.js';
import type { Partitions } from './partitions.js';
import { isStorableDesignator } from './set-records.js';
import type { UnusedSets } from './unused-sets.js';

const SETS_PER_NEWS = 20_000;

/** Reads one file, set by set. */
export type ReadSets = (path: string) => AsyncIterable<ElementSet | UnusedElements>;

/**
 * Reads all files one after the other and sends each set to the partition of its object or to the list of
 * unused ones.
 *
 * @returns the counts by file, in the order of `files`; `paired` and the like are still 0
 * @throws InputError for a file that cannot be read
 */
export async function readHistory(
  files: readonly string[],
  readSets: ReadSets,
  partitions: Partitions,
  unused: UnusedSets,
  progress: (filesDone: number, sets: number) => void,
): Promise<FileTally[]> {
  const tallies: FileTally[] = [];
  let sets = 0;
  for (const [index, file] of files.entries()) {
    const tally = emptyTally(file);
    for await (const item of readSets(file)) {
      tally.read++;
      if (++sets % SETS_PER_NEWS === 0) progress(index, sets);
      if (!('reason' in item) && isStorableDesignator(item.designator)) {
        partitions.add(item, index);
        continue;
      }
      unused.add(
        'reason' in item
          ? item
          : {
              source: item.source,
              designator: item.designator,
              reason: 'rejected',
              detail: `designator ${item.designator} is not a catalog number of up to nine digits`,
            },
      );
      tally.rejected++;
    }
    tallies.push(tally);
    progress(index + 1, sets);
  }
  return tallies;
}
