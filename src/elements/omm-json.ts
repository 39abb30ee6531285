import jsonc from 'jsonc-parser';
import type { Decoder, ReadOptions, SetOrRejection } from './decoder.js';
import { decodeText } from './file-bytes.js';
import { type OmmValue, readOmm, rejectedOmm } from './omm.js';
import { quoted } from './rejection.js';

const BLANK = 0x20;
const QUOTE = 0x22;
const COMMA = 0x2c;
const OPENING_BRACKET = 0x5b;
const BACKSLASH = 0x5c;
const CLOSING_BRACKET = 0x5d;
const OPENING_BRACE = 0x7b;
const CLOSING_BRACE = 0x7d;
/** Far more than a message needs; a brace too few must not swallow the file. */
const LONGEST_RECORD_BYTES = 65_536;
const LONGEST_SCRAP_BYTES = 1000;
/** A brace after a comma or another brace opens a record; inside one it would be the value of no key. */
const BETWEEN_RECORDS = /,\s*(?=\{)|(?<=\})\s*(?=\{)/;

/**
 * Decoder of OMM in JSON: an array of objects, one object, or objects one after the other. Objects are cut
 * out of the stream and parsed one by one, so that a damaged object costs only itself. `line` of a source is
 * the index of the record, from 1.
 */
export function ommJsonDecoder(file: string, options: ReadOptions): Decoder {
  let index = 0;
  let openArrays = 0;
  /** From the start of the record being read, or what of the last chunk is not scanned yet. */
  let buffer: Buffer = Buffer.alloc(0);
  let position = 0;
  let depth = 0;
  let inString = false;
  let escaped = false;
  let scrap: number[] = [];
  let records: SetOrRejection[] = [];

  function reject(text: string, detail: string): void {
    index += 1;
    records.push(rejectedOmm(new Map(), { file, line: index, text }, detail));
  }

  function endScrap(): void {
    while (scrap.at(-1) === COMMA) scrap.pop();
    if (scrap.length === 0) return;
    const bytes = Buffer.from(scrap);
    scrap = [];
    const text = decodeText(bytes, 0, bytes.length);
    reject(text, `${quoted(text)} stands outside of any object, expected { "EPOCH": ... }`);
  }

  function parseObject(text: string): Record<string, unknown> | undefined {
    try {
      const value: unknown = JSON.parse(text);
      return value as Record<string, unknown>;
    } catch {
      return undefined;
    }
  }

  function addObject(text: string): void {
    const object = parseObject(text);
    if (object === undefined) {
      reject(text, `not valid JSON: ${jsonFault(text)}`);
      return;
    }
    index += 1;
    const fields = new Map<string, OmmValue>();
    for (const [keyword, value] of Object.entries(object)) fields.set(keyword, { value });
    records.push(readOmm(fields, { file, line: index, text }, false, options));
  }

  /** One object, or several that a missing quote or brace made look like one. */
  function addObjects(text: string): void {
    const pieces = parseObject(text) === undefined ? text.split(BETWEEN_RECORDS) : [text];
    for (const piece of pieces) addObject(piece);
  }

  function endRecord(): void {
    addObjects(decodeText(buffer, 0, position));
    dropScanned();
  }

  function dropScanned(): void {
    buffer = buffer.subarray(position);
    position = 0;
    depth = 0;
    inString = false;
    escaped = false;
  }

  /** A record that does not end: cut before the next one if it can be seen, else given up. */
  function resynchronize(): void {
    // One character a byte, so that places in the text are places in the buffer.
    const boundary = BETWEEN_RECORDS.exec(buffer.toString('latin1', 0, position));
    if (boundary === null) {
      reject(decodeText(buffer, 0, position), `not valid JSON: no closing brace within ${position} bytes`);
    } else {
      addObject(decodeText(buffer, 0, boundary.index));
      position = boundary.index + boundary[0].length;
    }
    dropScanned();
  }

  function scanRecord(): void {
    while (position < buffer.length) {
      const byte = buffer[position];
      position += 1;
      if (inString) {
        if (escaped) escaped = false;
        else if (byte === BACKSLASH) escaped = true;
        else if (byte === QUOTE) inString = false;
      } else if (byte === QUOTE) {
        inString = true;
      } else if (byte === OPENING_BRACE) {
        depth += 1;
      } else if (byte === CLOSING_BRACE) {
        depth -= 1;
        if (depth === 0) {
          endRecord();
          return;
        }
      }
      if (position > LONGEST_RECORD_BYTES) {
        resynchronize();
        return;
      }
    }
  }

  function scanBetween(): void {
    while (position < buffer.length) {
      const byte = buffer[position];
      if (byte === OPENING_BRACE) {
        endScrap();
        buffer = buffer.subarray(position);
        position = 1;
        depth = 1;
        return;
      }
      position += 1;
      if (byte === OPENING_BRACKET) openArrays += 1;
      if (byte === CLOSING_BRACKET) openArrays -= 1;
      if (byte === OPENING_BRACKET || (byte === CLOSING_BRACKET && openArrays >= 0)) endScrap();
      else if (byte > BLANK && !(byte === COMMA && scrap.length === 0)) addToScrap(byte);
    }
    dropScanned();
  }

  function addToScrap(byte: number): void {
    if (scrap.length < LONGEST_SCRAP_BYTES) scrap.push(byte);
  }

  function taken(): SetOrRejection[] {
    const result = records;
    records = [];
    return result;
  }

  return {
    push(chunk) {
      buffer = buffer.length === 0 ? chunk : Buffer.concat([buffer, chunk]);
      while (position < buffer.length) {
        if (depth > 0) scanRecord();
        else scanBetween();
      }
      // A copy, so that the rest of a large chunk is not held.
      buffer = Buffer.from(buffer);
      return taken();
    },
    end() {
      if (depth > 0) addObjects(decodeText(buffer, 0, endOfRecords(buffer)));
      else endScrap();
      if (depth === 0 && openArrays > 0) reject('', 'the array is not closed with ]: the file is cut off');
      return taken();
    },
  };
}

/** Where the blanks and brackets that end the file begin: they are of the array, not of its last record. */
function endOfRecords(bytes: Buffer): number {
  let end = bytes.length;
  while (end > 0 && (bytes[end - 1] <= BLANK || bytes[end - 1] === CLOSING_BRACKET)) end -= 1;
  return end;
}

function jsonFault(text: string): string {
  const errors: jsonc.ParseError[] = [];
  try {
    jsonc.parse(text, errors, { disallowComments: true });
  } catch (error) {
    if (error instanceof RangeError) return 'nested too deeply';
    throw error;
  }
  const first = errors[0];
  if (first === undefined) return 'no closing brace';
  return `${jsonc.printParseErrorCode(first.error)} at character ${first.offset + 1}`;
}
