import { decodeText } from './file-bytes.js';

const LF = 10;
const CR = 13;
/** No line of an element set is longer; more is kept of none, so that memory stays bounded. */
const LONGEST_LINE_BYTES = 65_536;

export type Line = {
  /** Counted from 1, blank lines included. */
  readonly number: number;
  readonly text: string;
  /** The line went on beyond what `text` holds. */
  readonly cut: boolean;
};

export type LineSplitter = {
  /** Lines that the chunk completed; blank ones are left out. */
  readonly push: (chunk: Buffer) => Line[];
  /** What stood after the last line end. */
  readonly end: () => Line[];
};

/** Splits a stream of UTF-8 bytes at LF, CRLF and CR; each line is a string of its own, not a view of a chunk. */
export function lineSplitter(): LineSplitter {
  let number = 0;
  let carry: Buffer = Buffer.alloc(0);
  let cut = false;
  let lastWasCr = false;

  function keep(bytes: Buffer): void {
    const room = LONGEST_LINE_BYTES - carry.length;
    if (bytes.length > room) cut = true;
    if (room > 0 && bytes.length > 0) carry = Buffer.concat([carry, bytes.subarray(0, room)]);
  }

  function finish(lines: Line[], bytes: Buffer, start: number, end: number): void {
    number += 1;
    let text: string;
    if (carry.length === 0 && end - start <= LONGEST_LINE_BYTES) {
      text = decodeText(bytes, start, end);
    } else {
      keep(bytes.subarray(start, end));
      text = decodeText(carry, 0, carry.length);
      carry = Buffer.alloc(0);
    }
    if (text.trim() !== '') lines.push({ number, text, cut });
    cut = false;
  }

  return {
    push(chunk) {
      const lines: Line[] = [];
      let start = 0;
      if (lastWasCr && chunk.length > 0) {
        if (chunk[0] === LF) start = 1;
        lastWasCr = false;
      }
      let lf = chunk.indexOf(LF, start);
      let cr = chunk.indexOf(CR, start);
      while (lf >= 0 || cr >= 0) {
        const end = cr >= 0 && (lf < 0 || cr < lf) ? cr : lf;
        finish(lines, chunk, start, end);
        start = end + 1;
        if (end === cr) {
          if (lf === start) start += 1;
          else if (start === chunk.length) lastWasCr = true;
          cr = chunk.indexOf(CR, start);
        }
        if (lf >= 0 && lf < start) lf = chunk.indexOf(LF, start);
      }
      keep(chunk.subarray(start));
      return lines;
    },
    end() {
      const lines: Line[] = [];
      if (carry.length > 0) finish(lines, Buffer.alloc(0), 0, 0);
      return lines;
    },
  };
}
