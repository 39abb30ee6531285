import { createHash, type Hash } from 'node:crypto';
import { InputError } from '../input-error.js';
import { type Decoder, isUnused, type ReadOptions, type SetOrRejection } from './decoder.js';
import type { ElementSet, UnusedElements } from './element-set.js';
import { decodeText, inputLabel, readTextBytes } from './file-bytes.js';
import { isOmmCsvHeader, ommCsvDecoder } from './omm-csv.js';
import { ommJsonDecoder } from './omm-json.js';
import { ommKvnDecoder } from './omm-kvn.js';
import { twoLineDecoder } from './two-line.js';

/** What one file held: `read` records, `rejected` of them faulty. */
export type FileRead = {
  readonly file: string;
  /** SHA-256 of the bytes as they lay on disk, hexadecimal. */
  readonly sha256: string;
  readonly read: number;
  readonly rejected: number;
};

export type ReadResult = {
  /** In the order of the files and of the sets in them. */
  readonly sets: readonly ElementSet[];
  readonly rejected: readonly UnusedElements[];
  readonly files: readonly FileRead[];
};

type Format = 'two-line' | 'json' | 'csv' | 'xml' | 'kvn';

const DECODERS: Readonly<Record<Format, (file: string, options: ReadOptions) => Decoder | Promise<Decoder>>> =
  {
    'two-line': twoLineDecoder,
    json: ommJsonDecoder,
    csv: ommCsvDecoder,
    // Its parser takes longer to load than all the others together, and hardly any file needs it.
    xml: async (file, options) => (await import('./omm-xml.js')).ommXmlDecoder(file, options),
    kvn: ommKvnDecoder,
  };

/** The format shows in the first line that says something; this much is looked through for it. */
const LONGEST_HEAD_BYTES = 1 << 20;
const LONGEST_FIRST_LINE = 65_536;

const FORMATS = 'two-line sets or OMM in JSON, CSV, XML or KVN';

/**
 * Reads files of element sets whole: two-line and three-line sets, and OMM (CCSDS 502.0-B-3) in JSON, CSV,
 * XML and KVN, plain or gzip, all told by their content. Every set is verified; a faulty one becomes a
 * rejected record and never stops the run.
 *
 * @param paths files, `-` for standard input
 * @throws InputError if a file cannot be read, is damaged or binary, or holds not one usable set
 */
export async function readElementFiles(
  paths: readonly string[],
  options: ReadOptions = {},
): Promise<ReadResult> {
  const twice = paths.find((path, i) => paths.indexOf(path) !== i);
  if (twice !== undefined) throw new InputError(`${inputLabel(twice)} is named twice: name each file once`);
  const sets: ElementSet[] = [];
  const rejected: UnusedElements[] = [];
  const files: FileRead[] = [];
  for (const file of paths) {
    const hash = createHash('sha256');
    const setsBefore = sets.length;
    const rejectedBefore = rejected.length;
    for await (const record of records(file, options, hash)) {
      if (isUnused(record)) rejected.push(record);
      else sets.push(record);
    }
    const rejectedHere = rejected.length - rejectedBefore;
    files.push({
      file,
      sha256: hash.digest('hex'),
      read: sets.length - setsBefore + rejectedHere,
      rejected: rejectedHere,
    });
  }
  return { sets, rejected, files };
}

/**
 * Reads one file as `readElementFiles` does, record by record, with memory bounded whatever its length.
 * A set does not hold on to more of the file than its own text.
 *
 * @param path a file, or `-` for standard input
 * @throws InputError as `readElementFiles`; that not one set was usable shows only at the end
 */
export function streamElementSets(path: string, options: ReadOptions = {}): AsyncGenerator<SetOrRejection> {
  return records(path, options);
}

async function* records(path: string, options: ReadOptions, hash?: Hash): AsyncGenerator<SetOrRejection> {
  let head: Buffer = Buffer.alloc(0);
  let decoder: Decoder | undefined;
  let format: Format | undefined;
  let used = 0;
  let rejected = 0;
  let firstRejected: UnusedElements | undefined;

  function count(record: SetOrRejection): void {
    if (isUnused(record)) {
      rejected += 1;
      firstRejected ??= record;
    } else {
      used += 1;
    }
  }

  for await (const chunk of readTextBytes(path, hash)) {
    let bytes = chunk;
    if (decoder === undefined) {
      head = Buffer.concat([head, chunk]);
      const line = firstLine(head, false);
      if (line === undefined && head.length < LONGEST_HEAD_BYTES) continue;
      format = formatOf(line ?? '', path);
      decoder = await DECODERS[format](path, options);
      bytes = head;
    }
    for (const record of decoder.push(bytes)) {
      count(record);
      yield record;
    }
  }
  if (decoder === undefined) {
    const line = firstLine(head, true);
    if (line === undefined) {
      const what = head.length === 0 ? 'is empty' : 'holds only blank lines and comments';
      throw new InputError(`${inputLabel(path)} ${what}: give ${FORMATS}`);
    }
    format = formatOf(line, path);
    decoder = await DECODERS[format](path, options);
    for (const record of decoder.push(head)) {
      count(record);
      yield record;
    }
  }
  for (const record of decoder.end()) {
    count(record);
    yield record;
  }
  if (used === 0) throw new InputError(nothingUsable(path, format, rejected, firstRejected));
}

function nothingUsable(
  path: string,
  format: Format | undefined,
  rejected: number,
  first: UnusedElements | undefined,
): string {
  if (first === undefined) return `${inputLabel(path)} holds no element set: give ${FORMATS}`;
  const place = `${format === 'json' ? 'record' : 'line'} ${first.source.line}`;
  const count = rejected === 1 ? '1 record rejected' : `all ${rejected} records rejected, the first`;
  return `${inputLabel(path)} holds no usable element set (${count} at ${place}: ${first.detail}): give ${FORMATS}`;
}

/**
 * The first line that is neither blank nor a comment.
 *
 * @param whole there is nothing after `bytes`
 * @returns `undefined` if there is none, or it is not complete yet
 */
function firstLine(bytes: Buffer, whole: boolean): string | undefined {
  const lines = decodeText(bytes, 0, bytes.length).split(/\r\n?|\n/);
  for (const [i, line] of lines.entries()) {
    const text = line.trim();
    if (text === '' || text.startsWith('#')) continue;
    const complete = whole || i < lines.length - 1 || text.length >= LONGEST_FIRST_LINE;
    return complete ? text : undefined;
  }
  return undefined;
}

function formatOf(line: string, path: string): Format {
  if (/^(?:\{|\[\s*(?:$|[[{\]]))/.test(line)) return 'json';
  if (/^<(?:!doctype\s+html|html)\b/i.test(line)) {
    throw new InputError(`${inputLabel(path)} is a web page, not element sets: fetch ${FORMATS}`);
  }
  if (line.startsWith('<')) return 'xml';
  if (/^CCSDS_[A-Z]+_VERS\s*=/.test(line)) return 'kvn';
  return isOmmCsvHeader(line) ? 'csv' : 'two-line';
}
