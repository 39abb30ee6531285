import { createHash } from 'node:crypto';
import { readFile } from 'node:fs/promises';
import { decodeText } from '../../elements/file-bytes.js';
import { parseUtc } from '../../elements/utc.js';
import { InputError } from '../../input-error.js';
import type { CsvRecord } from '../../uncertainty/read-csv.js';
import { fileError } from '../file-errors.js';
import type { OtherFile } from '../inputs.js';

/**
 * Reads a file whole, with its hash for the record of the run.
 *
 * @throws InputError where it cannot be read
 */
export async function readText(path: string): Promise<{ readonly text: string; readonly file: OtherFile }> {
  const bytes = await readFile(path).catch((error: unknown) => {
    throw fileError(path, error);
  });
  const sha256 = createHash('sha256').update(bytes).digest('hex');
  return { text: decodeText(bytes, 0, bytes.length), file: { file: path, sha256 } };
}

/**
 * A cell as a time, milliseconds of UTC since 1970-01-01.
 *
 * @throws InputError with file, line, column and value
 */
export function timeCell({ cells, line }: CsvRecord, file: string, column: string): number {
  const ms = parseUtc(cells[column]);
  if (ms !== undefined) return ms;
  throw new InputError(
    `${file}:${line}: ${column} is ${JSON.stringify(cells[column])}, expected a UTC time such as 2026-12-05T15:22:30Z`,
  );
}
