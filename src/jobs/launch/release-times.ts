import { formatUtc } from '../../elements/utc.js';
import { InputError } from '../../input-error.js';
import { readCsv } from '../../uncertainty/read-csv.js';
import { type BatchSet, objectNamed } from './read-batch.js';
import { timeCell } from './read-table.js';

/**
 * Reads when each object of the batch is released: CSV (see `readCsv`) with the columns `object`
 * (designator or name) and `release_utc`, one row for each object.
 *
 * @param file as the user named it, for errors
 * @returns milliseconds of UTC since 1970-01-01 by designator
 * @throws InputError with file, line and value
 */
export function readReleaseTimes(
  text: string,
  file: string,
  sets: readonly BatchSet[],
  liftoffMs: number,
): Map<string, number> {
  // Of an object that flies in several phases one set is enough to find it.
  const objects = [...new Map(sets.map((each) => [each.set.designator, each])).values()];
  const releases = new Map<string, number>();
  const lineOf = new Map<string, number>();
  for (const record of readCsv(text, file, ['object', 'release_utc'], [])) {
    const where = `${file}:${record.line}`;
    const { designator } = objectNamed(record.cells.object, objects, where).set;
    const earlier = lineOf.get(designator);
    if (earlier !== undefined) {
      throw new InputError(`${where}: ${designator} is already on line ${earlier}: leave one row an object`);
    }
    const ms = timeCell(record, file, 'release_utc');
    if (ms < liftoffMs) {
      throw new InputError(
        `${where}: release_utc is ${formatUtc(ms)}, before liftoff at ${formatUtc(liftoffMs)}`,
      );
    }
    lineOf.set(designator, record.line);
    releases.set(designator, ms);
  }
  const missing = objects.filter(({ set }) => !releases.has(set.designator));
  if (missing.length > 0) {
    const more = missing.length === 1 ? '' : ` and ${missing.length - 1} more`;
    throw new InputError(
      `${file}: no release_utc for ${missing[0].set.designator}${more}: add a row for each`,
    );
  }
  return releases;
}
