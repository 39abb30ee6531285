import { XMLParser, XMLValidator } from 'fast-xml-parser';
import type { Decoder, ReadOptions, SetOrRejection } from './decoder.js';
import { decodeText } from './file-bytes.js';
import { type OmmFields, type OmmValue, readOmm, rejectedOmm } from './omm.js';
import { quoted, Rejection } from './rejection.js';

const LF = 0x0a;
const CR = 0x0d;
const BLANK = 0x20;
const EXCLAMATION_MARK = 0x21;
const SLASH = 0x2f;
const OPENING_ANGLE = 0x3c;
const CLOSING_ANGLE = 0x3e;
const QUESTION_MARK = 0x3f;
/** Far more than a message needs; a missing end tag must not swallow the file. */
const LONGEST_MESSAGE_BYTES = 1 << 20;
const LONGEST_SCRAP_BYTES = 1000;
const TAG_NAME = /^<\/?([A-Za-z_][\w.:-]*)/;
const COMMENT_START = '<!--';
const COMMENT_END = '-->';
const MESSAGE_START = '<omm';
const MESSAGE_END = '</omm>';
/** Elements that may stand beside the messages of a combined message (CCSDS 505.0-B). */
const BESIDE_MESSAGES: ReadonlySet<string> = new Set(['COMMENT', 'MESSAGE_ID']);

const parser = new XMLParser({
  ignoreAttributes: false,
  attributeNamePrefix: '@',
  parseTagValue: false,
  parseAttributeValue: false,
  trimValues: true,
});

type XmlNode = { readonly [name: string]: unknown };

/**
 * Decoder of OMM in XML: one `omm`, or any number inside an `ndm`. Each `omm` element is cut out of the
 * stream and parsed by itself, so that a damaged one costs only itself; what else stands in the file (an
 * `oem`, text between the elements) becomes one rejected record a run.
 */
export function ommXmlDecoder(file: string, options: ReadOptions): Decoder {
  let buffer: Buffer = Buffer.alloc(0);
  let line = 1;
  let lastWasCr = false;
  let openRoots = 0;
  /** The element beside the messages that is open, and of no interest. */
  let beside: string | undefined;
  let scrap: { line: number; text: string; element: string | undefined } | undefined;
  let records: SetOrRejection[] = [];

  function consume(length: number): void {
    for (let i = 0; i < length; i++) {
      const byte = buffer[i];
      if (byte === CR || (byte === LF && !lastWasCr)) line += 1;
      lastWasCr = byte === CR;
    }
    buffer = buffer.subarray(length);
  }

  function addScrap(length: number, element?: string): void {
    scrap ??= { line, text: '', element };
    const room = LONGEST_SCRAP_BYTES - scrap.text.length;
    if (room > 0) scrap.text += decodeText(buffer, 0, Math.min(length, room));
    consume(length);
  }

  function endScrap(): void {
    if (scrap === undefined) return;
    const text = scrap.text.trim();
    const what = scrap.element === undefined ? quoted(text) : `<${scrap.element}>`;
    reject(scrap.line, text, `${what} is no orbit mean-elements message, expected <omm>`);
    scrap = undefined;
  }

  function endBeside(): void {
    if (beside === undefined) return;
    reject(line, '', `<${beside}> before this line is not closed`);
    beside = undefined;
  }

  function reject(at: number, text: string, detail: string): void {
    records.push(rejectedOmm(new Map(), { file, line: at, text }, detail));
  }

  function addMessage(length: number): void {
    const text = decodeText(buffer, 0, length);
    const source = { file, line, text };
    try {
      records.push(readOmm(fieldsOf(text, line), source, true, options));
    } catch (error) {
      if (!(error instanceof Rejection)) throw error;
      reject(line, text, error.message);
    }
    consume(length);
  }

  function addBroken(length: number, detail: string): void {
    reject(line, decodeText(buffer, 0, length).trimEnd(), detail);
    consume(length);
  }

  /** Takes one thing off the front of the buffer; `false` if its end has not come yet. */
  function step(atEnd: boolean): boolean {
    let blanks = 0;
    while (blanks < buffer.length && buffer[blanks] <= BLANK) blanks += 1;
    consume(blanks);
    if (buffer.length === 0) return false;
    const mayWait = !atEnd && buffer.length < LONGEST_MESSAGE_BYTES;
    if (mayWait && buffer.length < COMMENT_START.length) return false;
    if (buffer[0] === OPENING_ANGLE && buffer.toString('latin1', 0, COMMENT_START.length) === COMMENT_START) {
      return skipComment(mayWait);
    }
    const end = tokenEnd();
    if (end === buffer.length && buffer[end - 1] !== CLOSING_ANGLE && mayWait) return false;
    return take(end, mayWait);
  }

  /** Where the text or tag at the front ends: after `>`, or before `<`. */
  function tokenEnd(): number {
    const isTag = buffer[0] === OPENING_ANGLE;
    for (let i = 1; i < buffer.length; i++) {
      if (buffer[i] === OPENING_ANGLE) return i;
      if (isTag && buffer[i] === CLOSING_ANGLE) return i + 1;
    }
    return buffer.length;
  }

  function skipComment(mayWait: boolean): boolean {
    const end = buffer.indexOf(COMMENT_END, COMMENT_START.length);
    if (end < 0 && mayWait) return false;
    if (end < 0) addScrap(buffer.length);
    else consume(end + COMMENT_END.length);
    return true;
  }

  function take(end: number, mayWait: boolean): boolean {
    const name = buffer[end - 1] === CLOSING_ANGLE ? tagName(end) : undefined;
    const isEnd = buffer[1] === SLASH;
    if (name === 'omm' && !isEnd) return takeMessage(end, mayWait);
    if (beside !== undefined) {
      if (name === beside && isEnd) beside = undefined;
      consume(end);
    } else if (name === 'ndm' && (!isEnd || openRoots > 0)) {
      openRoots += isEnd ? -1 : 1;
      consume(end);
    } else if (name !== undefined && BESIDE_MESSAGES.has(name) && !isEnd && scrap === undefined) {
      if (buffer[end - 2] !== SLASH) beside = name;
      consume(end);
    } else if (
      buffer[0] === OPENING_ANGLE &&
      (buffer[1] === QUESTION_MARK || buffer[1] === EXCLAMATION_MARK)
    ) {
      consume(end);
    } else {
      addScrap(end, name);
    }
    return true;
  }

  function tagName(end: number): string | undefined {
    return TAG_NAME.exec(buffer.toString('latin1', 0, end))?.[1];
  }

  function takeMessage(tagEnd: number, mayWait: boolean): boolean {
    // The next start first: it bounds the search for the end.
    const next = buffer.indexOf(MESSAGE_START, tagEnd);
    const end = buffer.subarray(0, next < 0 ? buffer.length : next).indexOf(MESSAGE_END, tagEnd);
    if (end < 0 && next < 0 && mayWait) return false;
    endBeside();
    endScrap();
    if (end >= 0) addMessage(end + MESSAGE_END.length);
    else if (next >= 0) addBroken(next, 'no </omm> before the next <omm>');
    else addBroken(buffer.length, 'no </omm>: the file is cut off');
    return true;
  }

  function taken(): SetOrRejection[] {
    const result = records;
    records = [];
    return result;
  }

  return {
    push(chunk) {
      buffer = Buffer.concat([buffer, chunk]);
      while (step(false));
      return taken();
    },
    end() {
      while (step(true));
      endBeside();
      endScrap();
      if (openRoots > 0) reject(line, '', 'the root element is not closed: the file is cut off');
      return taken();
    },
  };
}

function fieldsOf(text: string, firstLine: number): OmmFields {
  const validity = XMLValidator.validate(text);
  if (validity !== true) {
    const { msg, line } = validity.err;
    // The message counts lines from the start of the element, and would contradict ours.
    const message = msg.replace(/ \(opened in [^)]*\)/, '');
    throw new Rejection(`not valid XML in line ${firstLine + line - 1}: ${message}`);
  }
  const segment = child(child(child(parse(text), 'omm'), 'body'), 'segment');
  const data = child(segment, 'data');
  const fields = new Map<string, OmmValue>();
  addLeaves(fields, child(segment, 'metadata'));
  addLeaves(fields, child(data, 'meanElements'));
  if ('tleParameters' in data) addLeaves(fields, child(data, 'tleParameters'));
  return fields;
}

function parse(text: string): XmlNode {
  try {
    return parser.parse(text) as XmlNode;
  } catch (error) {
    throw new Rejection(`not valid XML: ${error instanceof Error ? error.message : String(error)}`);
  }
}

function child(node: XmlNode, name: string): XmlNode {
  const found = node[name];
  if (Array.isArray(found)) throw new Rejection(`<${name}> stands ${found.length} times, expected once`);
  if (typeof found === 'object' && found !== null) return found as XmlNode;
  throw new Rejection(`<${name}> is missing or empty`);
}

function addLeaves(fields: Map<string, OmmValue>, node: XmlNode): void {
  for (const [keyword, entry] of Object.entries(node)) {
    if (keyword === 'COMMENT' || keyword.startsWith('@') || keyword === '#text') continue;
    if (Array.isArray(entry) || fields.has(keyword)) {
      throw new Rejection(`<${keyword}> stands more than once, expected once`);
    }
    if (typeof entry !== 'object' || entry === null) {
      fields.set(keyword, { value: entry });
      continue;
    }
    const { '#text': value = '', '@units': unit } = entry as XmlNode;
    fields.set(keyword, typeof unit === 'string' ? { value, unit } : { value });
  }
}
