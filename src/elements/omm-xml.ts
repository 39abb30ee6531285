import { XMLParser, XMLValidator } from 'fast-xml-parser';
import type { Decoder, ReadOptions, SetOrRejection } from './decoder.js';
import { decodeText } from './file-bytes.js';
import { type OmmFields, type OmmValue, readOmm, rejectedOmm } from './omm.js';
import { quoted, Rejection } from './rejection.js';

const LF = 0x0a;
const CR = 0x0d;
const BLANK = 0x20;
const OPENING_ANGLE = 0x3c;
/** Far more than a message needs; a missing end tag must not swallow the file. */
const LONGEST_ELEMENT_BYTES = 1 << 20;
const LONGEST_SCRAP_CHARACTERS = 1000;
const TAG = /^<(\/?)([A-Za-z_][\w.:-]*)(?:\s[\s\S]*)?(?=>$)/;
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
 * Decoder of OMM in XML: one `omm`, or any number inside an `ndm` or another root. Each `omm` element is cut
 * out of the stream and parsed by itself, so that a damaged one costs only itself; what else stands in the
 * file (an `oem`, text between the elements) becomes one rejected record a run.
 */
export function ommXmlDecoder(file: string, options: ReadOptions): Decoder {
  let buffer: Buffer = Buffer.alloc(0);
  let line = 1;
  let lastWasCr = false;
  let openRoots = 0;
  let scrap: { line: number; text: string; name: string } | undefined;
  let records: SetOrRejection[] = [];

  function consume(length: number): void {
    for (let i = 0; i < length; i++) {
      const byte = buffer[i];
      if (byte === CR || (byte === LF && !lastWasCr)) line += 1;
      lastWasCr = byte === CR;
    }
    buffer = buffer.subarray(length);
  }

  function addScrap(length: number, name: string): void {
    const text = decodeText(buffer, 0, Math.min(length, LONGEST_SCRAP_CHARACTERS));
    scrap ??= { line, text: '', name };
    scrap.text = (scrap.text + text).slice(0, LONGEST_SCRAP_CHARACTERS);
    consume(length);
  }

  function endScrap(): void {
    if (scrap === undefined) return;
    const what = scrap.name === '' ? quoted(scrap.text.trim()) : `<${scrap.name}>`;
    reject(scrap.line, scrap.text.trim(), `${what} is no orbit mean-elements message, expected <omm>`);
    scrap = undefined;
  }

  function reject(at: number, text: string, detail: string): void {
    records.push(rejectedOmm(new Map(), { file, line: at, text }, detail));
  }

  function addMessage(length: number): void {
    endScrap();
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
    endScrap();
    reject(line, decodeText(buffer, 0, length).trimEnd(), detail);
    consume(length);
  }

  /** Takes one thing off the front of the buffer; `false` if its end has not come yet. */
  function step(atEnd: boolean): boolean {
    let blanks = 0;
    while (blanks < buffer.length && buffer[blanks] <= BLANK) blanks += 1;
    consume(blanks);
    if (buffer.length === 0) return false;
    const mayWait = !atEnd && buffer.length < LONGEST_ELEMENT_BYTES;
    if (buffer[0] !== OPENING_ANGLE) {
      const next = buffer.indexOf('<');
      addScrap(next < 0 ? buffer.length : next, '');
      return true;
    }
    const tagEnd = buffer.indexOf('>') + 1;
    if (tagEnd === 0) {
      if (mayWait) return false;
      addScrap(buffer.length, '');
      return true;
    }
    const start = buffer.toString('latin1', 0, 4);
    if (start === '<!--') return skipTo('-->', 3, mayWait);
    if (start.startsWith('<?') || start.startsWith('<!')) {
      consume(tagEnd);
      return true;
    }
    const match = TAG.exec(buffer.toString('latin1', 0, tagEnd));
    if (match === null) {
      addScrap(tagEnd, '');
      return true;
    }
    const [, slash, name] = match;
    return slash === '/' ? endTag(tagEnd) : startTag(name, tagEnd, mayWait);
  }

  function skipTo(text: string, length: number, mayWait: boolean): boolean {
    const end = buffer.indexOf(text);
    if (end < 0 && mayWait) return false;
    if (end < 0) addScrap(buffer.length, '');
    else consume(end + length);
    return true;
  }

  function endTag(tagEnd: number): boolean {
    if (openRoots > 0) {
      openRoots -= 1;
      consume(tagEnd);
    } else {
      addScrap(tagEnd, '');
    }
    return true;
  }

  function startTag(name: string, tagEnd: number, mayWait: boolean): boolean {
    const closing = `</${name}>`;
    const end = buffer.indexOf(closing, tagEnd);
    const nextMessage = buffer.indexOf('<omm', tagEnd);
    const beforeNext = end >= 0 && (nextMessage < 0 || end < nextMessage);
    if (name === 'omm') {
      if (beforeNext) addMessage(end + closing.length);
      else if (nextMessage >= 0) addBroken(nextMessage, 'no </omm> before the next <omm>');
      else if (mayWait) return false;
      else addBroken(buffer.length, 'no </omm>: the file is cut off');
    } else if (BESIDE_MESSAGES.has(name)) {
      return skipTo(closing, closing.length, mayWait);
    } else if (buffer[tagEnd - 2] === 0x2f) {
      addScrap(tagEnd, name);
    } else if (name !== 'ndm' && beforeNext) {
      addScrap(end + closing.length, name);
    } else if (name !== 'ndm' && nextMessage < 0 && mayWait) {
      return false;
    } else {
      openRoots += 1;
      consume(tagEnd);
    }
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
