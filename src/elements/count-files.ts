import { InputError } from '../input-error.js';
import type { ElementSet, FileCount } from './element-set.js';
import { inputLabel } from './file-bytes.js';
import type { FileRead } from './read.js';
import type { Selection } from './select.js';

type Tally = { -readonly [Key in keyof FileCount]: FileCount[Key] };

/**
 * Accounts for every record of every file: read = used + superseded + rejected, file by file. A file that was
 * read twice, for the fleet and for the catalog, has one row with both readings.
 *
 * @param files every reading, in order
 * @returns a row a file, in the order of first reading
 * @throws InputError if a file changed between two readings
 * @throws Error if the accounts do not add up, which is a fault of the program
 */
export function countFiles(files: readonly FileRead[], selection: Selection): FileCount[] {
  const tallies = new Map<string, Tally>();
  for (const { file, sha256, read, rejected } of files) {
    const tally = tallies.get(file);
    if (tally === undefined) {
      tallies.set(file, { file, sha256, read, used: 0, superseded: 0, rejected });
      continue;
    }
    if (tally.sha256 !== sha256) {
      throw new InputError(`${inputLabel(file)} changed while it was read: run again once it is written`);
    }
    tally.read += read;
    tally.rejected += rejected;
  }
  for (const set of selection.fleet) tallyOf(tallies, set).used += 1;
  for (const set of selection.catalog) tallyOf(tallies, set).used += 1;
  for (const set of selection.superseded) tallyOf(tallies, set).superseded += 1;
  const counts = [...tallies.values()];
  for (const { file, read, used, superseded, rejected } of counts) {
    if (read !== used + superseded + rejected) {
      throw new Error(
        `${file}: ${read} records read, but ${used} used, ${superseded} superseded and ${rejected} rejected`,
      );
    }
  }
  return counts;
}

function tallyOf(tallies: ReadonlyMap<string, Tally>, { source }: Pick<ElementSet, 'source'>): Tally {
  const tally = tallies.get(source.file);
  if (tally === undefined) throw new Error(`a set of ${source.file}, a file that was not counted as read`);
  return tally;
}
