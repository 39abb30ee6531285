import type { Decoder, ReadOptions, SetOrRejection } from './decoder.js';
import type { ElementSource } from './element-set.js';
import { type Line, lineSplitter } from './lines.js';
import { type OmmValue, readOmm, rejectedOmm } from './omm.js';
import { quoted } from './rejection.js';

const MESSAGE_START = /^CCSDS_[A-Z]+_VERS\s*=/;
const COMMENT = /^COMMENT(?:\s|$)/;
const KEYWORD = /^[A-Z][A-Z0-9_]*$/;
const MOST_LINES_KEPT = 200;

type Message = {
  readonly first: number;
  readonly lines: string[];
  lineCount: number;
  readonly fields: Map<string, OmmValue>;
  fault: string | undefined;
};

/** Decoder of OMM in KVN: any number of messages in a row, each from its `CCSDS_OMM_VERS` on. */
export function ommKvnDecoder(file: string, options: ReadOptions): Decoder {
  const splitter = lineSplitter();
  let message: Message | undefined;

  function finish(records: SetOrRejection[]): void {
    if (message === undefined) return;
    const text = [...message.lines];
    if (message.lineCount > text.length) text.push(`(${message.lineCount - text.length} more lines)`);
    const source: ElementSource = { file, line: message.first, text: text.join('\n') };
    // A foreign message is told by its first line, whatever its further lines look like.
    const foreign = !message.fields.has('CCSDS_OMM_VERS') && startsMessage(message.lines[0]);
    records.push(
      message.fault === undefined || foreign
        ? readOmm(message.fields, source, true, options)
        : rejectedOmm(message.fields, source, message.fault),
    );
    message = undefined;
  }

  function take(line: Line, records: SetOrRejection[]): void {
    const body = line.text.trim();
    if (body.startsWith('#')) return;
    if (startsMessage(body)) finish(records);
    message ??= {
      first: line.number,
      lines: [],
      lineCount: 0,
      fields: new Map(),
      fault: startsMessage(body) ? undefined : 'no CCSDS_OMM_VERS line before it',
    };
    if (message.lines.length < MOST_LINES_KEPT) message.lines.push(line.text);
    message.lineCount += 1;
    if (!COMMENT.test(body)) message.fault ??= addAssignment(message.fields, body, line);
  }

  function takeAll(lines: readonly Line[]): SetOrRejection[] {
    const records: SetOrRejection[] = [];
    for (const line of lines) take(line, records);
    return records;
  }

  return {
    push: (chunk) => takeAll(splitter.push(chunk)),
    end() {
      const records = takeAll(splitter.end());
      finish(records);
      return records;
    },
  };
}

function startsMessage(text: string): boolean {
  return MESSAGE_START.test(text.trim());
}

/** @returns what is wrong with the line, if anything is */
function addAssignment(fields: Map<string, OmmValue>, body: string, line: Line): string | undefined {
  const equals = body.indexOf('=');
  const keyword = body.slice(0, Math.max(equals, 0)).trim();
  if (line.cut || !KEYWORD.test(keyword)) {
    return `line ${line.number} is ${quoted(body)}, expected KEYWORD = value`;
  }
  if (fields.has(keyword)) return `${keyword} is given again in line ${line.number}, expected once a message`;
  const value = body.slice(equals + 1).trim();
  const unitStart = value.endsWith(']') ? value.lastIndexOf('[') : -1;
  if (unitStart < 0) fields.set(keyword, { value });
  else
    fields.set(keyword, {
      value: value.slice(0, unitStart).trim(),
      unit: value.slice(unitStart + 1, -1).trim(),
    });
  return undefined;
}
