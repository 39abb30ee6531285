import { isUtf8 } from 'node:buffer';
import type { Hash } from 'node:crypto';
import { createReadStream } from 'node:fs';
import { pipeline } from 'node:stream';
import { createGunzip } from 'node:zlib';
import { InputError } from '../input-error.js';

const CHUNK_BYTES = 1 << 18;
const HEAD_BYTES = 3;

const READ_ERRORS: Readonly<Record<string, string>> = {
  ENOENT: 'does not exist: check the path',
  ENOTDIR: 'does not exist: a part of its path is a file, not a directory',
  EISDIR: 'is a directory: name the element-set files in it',
  EACCES: 'cannot be read: permission denied',
  EPERM: 'cannot be read: permission denied',
  ENAMETOOLONG: 'does not exist: the path is too long',
  ELOOP: 'cannot be read: its symbolic links go in a circle',
};

/** How messages name an input: the path, or words for `-`. */
export function inputLabel(path: string): string {
  return path === '-' ? 'standard input' : path;
}

/**
 * The text of an input as UTF-8 bytes, chunk by chunk: gzip is unpacked (known by its first bytes, several
 * members in a row included), UTF-16 with a byte-order mark is recoded, the mark of UTF-8 is dropped.
 *
 * @param path a file, or `-` for standard input
 * @param hash receives the bytes as they lie on disk
 * @throws InputError if the input cannot be read, is a damaged gzip file, or holds binary data
 */
export async function* readTextBytes(path: string, hash?: Hash): AsyncGenerator<Buffer> {
  let readError: unknown;
  try {
    const raw = path === '-' ? process.stdin : createReadStream(path, { highWaterMark: CHUNK_BYTES });
    raw.once('error', (error: unknown) => {
      readError = error;
    });
    for await (const chunk of recoded(unpacked(hashed(raw, hash), path))) {
      if (chunk.includes(0)) {
        throw new InputError(
          `${inputLabel(path)} holds binary data (a zero byte), not element sets: give a text file or its gzip`,
        );
      }
      yield chunk;
    }
  } catch (error) {
    if (error instanceof InputError) throw error;
    throw new InputError(`${inputLabel(path)} ${readErrorText(readError ?? error)}`);
  }
}

/** Decodes UTF-8; bytes that are none are taken as Latin-1, so that no character of a name is lost. */
export function decodeText(bytes: Buffer, start: number, end: number): string {
  const text = bytes.toString('utf8', start, end);
  if (!text.includes('\uFFFD') || isUtf8(bytes.subarray(start, end))) return text;
  return bytes.toString('latin1', start, end);
}

function readErrorText(error: unknown): string {
  const code = error instanceof Error && 'code' in error ? String(error.code) : '';
  const known = READ_ERRORS[code];
  if (known !== undefined) return known;
  return `cannot be read: ${error instanceof Error ? error.message : String(error)}`;
}

async function* hashed(raw: AsyncIterable<unknown>, hash?: Hash): AsyncGenerator<Buffer> {
  for await (const chunk of raw) {
    const bytes = Buffer.isBuffer(chunk) ? chunk : Buffer.from(String(chunk));
    hash?.update(bytes);
    yield bytes;
  }
}

async function* unpacked(source: AsyncGenerator<Buffer>, path: string): AsyncGenerator<Buffer> {
  const { head, rest } = await peek(source);
  if (head[0] !== 0x1f || head[1] !== 0x8b) {
    yield* rest;
    return;
  }
  let packedBytes = 0;
  async function* counted(): AsyncGenerator<Buffer> {
    for await (const chunk of rest) {
      packedBytes += chunk.length;
      yield chunk;
    }
  }
  let sourceError: unknown;
  const gunzip = createGunzip({ chunkSize: CHUNK_BYTES });
  pipeline(counted(), gunzip, (error) => {
    sourceError = error;
  });
  try {
    for await (const chunk of gunzip) yield chunk as Buffer;
  } catch (error) {
    const code = error instanceof Error && 'code' in error ? String(error.code) : '';
    if (!code.startsWith('Z_')) throw sourceError ?? error;
    const reason = error instanceof Error ? error.message : code;
    throw new InputError(`${inputLabel(path)} is a damaged gzip file (${reason}): fetch it again`);
  }
  if (gunzip.bytesWritten !== packedBytes) {
    throw new InputError(
      `${inputLabel(path)} is a damaged gzip file (${packedBytes - gunzip.bytesWritten} bytes follow its end): fetch it again`,
    );
  }
}

async function* recoded(source: AsyncGenerator<Buffer>): AsyncGenerator<Buffer> {
  const { head, rest } = await peek(source);
  const utf16 = utf16Encoding(head);
  if (utf16 !== undefined) {
    const decoder = new TextDecoder(utf16);
    for await (const chunk of rest) yield Buffer.from(decoder.decode(chunk, { stream: true }));
    yield Buffer.from(decoder.decode());
    return;
  }
  const marked = head[0] === 0xef && head[1] === 0xbb && head[2] === 0xbf;
  let first = true;
  for await (const chunk of rest) {
    yield first && marked ? chunk.subarray(3) : chunk;
    first = false;
  }
}

function utf16Encoding(head: Buffer): 'utf-16le' | 'utf-16be' | undefined {
  if (head[0] === 0xff && head[1] === 0xfe) return 'utf-16le';
  if (head[0] === 0xfe && head[1] === 0xff) return 'utf-16be';
  return undefined;
}

/** The first bytes of a source, and the whole source again: its first chunk holds at least these bytes. */
async function peek(source: AsyncGenerator<Buffer>): Promise<{ head: Buffer; rest: AsyncGenerator<Buffer> }> {
  let head = Buffer.alloc(0);
  while (head.length < HEAD_BYTES) {
    const next = await source.next();
    if (next.done === true) break;
    head = Buffer.concat([head, next.value]);
  }
  async function* rest(): AsyncGenerator<Buffer> {
    try {
      yield head;
      yield* source;
    } finally {
      await source.return(undefined);
    }
  }
  return { head, rest: rest() };
}
