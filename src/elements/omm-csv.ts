import { parse } from 'csv-parse/sync';
import type { Decoder, ReadOptions, SetOrRejection } from './decoder.js';
import { type Line, lineSplitter } from './lines.js';
import { OMM_KEYWORDS, type OmmValue, readOmm, rejectedOmm } from './omm.js';
import { quoted } from './rejection.js';

const KEYWORDS_OF_A_HEADER = 3;

type Row = { readonly line: Line; readonly cells: readonly string[] | undefined };

/**
 * Decoder of OMM in CSV: one header line of keywords, one line a set. A later line of keywords is a new
 * header, as it stands where files were joined. A value cannot run over a line end, so that a stray quote
 * costs one set, not the rest of the file.
 */
export function ommCsvDecoder(file: string, options: ReadOptions): Decoder {
  const splitter = lineSplitter();
  let header: readonly string[] | undefined;

  function decode(row: Row): SetOrRejection[] {
    const { line, cells } = row;
    const source = { file, line: line.number, text: line.text };
    if (cells !== undefined && isHeader(cells)) {
      header = cells.map((cell) => cell.trim());
      const twice = header.find((keyword, i) => keyword !== '' && header?.indexOf(keyword) !== i);
      if (twice === undefined) return [];
      header = undefined;
      return [rejectedOmm(new Map(), source, `the header names ${quoted(twice)} twice`)];
    }
    const fields = new Map<string, OmmValue>();
    if (cells === undefined)
      return [rejectedOmm(fields, source, 'quotes that do not close, expected one line a set')];
    if (header === undefined)
      return [rejectedOmm(fields, source, 'no header line of OMM keywords before it')];
    for (let i = 0; i < header.length && i < cells.length; i++) fields.set(header[i], { value: cells[i] });
    if (cells.length !== header.length) {
      return [
        rejectedOmm(fields, source, `${cells.length} values, expected ${header.length} as in the header`),
      ];
    }
    return [readOmm(fields, source, false, options)];
  }

  return {
    push: (chunk) => rowsOf(splitter.push(chunk)).flatMap(decode),
    end: () => rowsOf(splitter.end()).flatMap(decode),
  };
}

/** Whether a line of text is the header of an OMM table. */
export function isOmmCsvHeader(text: string): boolean {
  const cells = cellsOf(text);
  return cells !== undefined && isHeader(cells);
}

function isHeader(cells: readonly string[]): boolean {
  let keywords = 0;
  for (const cell of cells) if (OMM_KEYWORDS.has(cell.trim())) keywords += 1;
  return keywords >= KEYWORDS_OF_A_HEADER;
}

function rowsOf(lines: readonly Line[]): Row[] {
  const kept = lines.filter((line) => !line.text.trimStart().startsWith('#'));
  const whole = kept.every((line) => !line.cut)
    ? parseRows(kept.map((line) => line.text).join('\n'))
    : undefined;
  if (whole?.length === kept.length) return kept.map((line, i) => ({ line, cells: whole[i] }));
  return kept.map((line) => ({ line, cells: line.cut ? undefined : cellsOf(line.text) }));
}

function cellsOf(text: string): string[] | undefined {
  const rows = parseRows(text);
  return rows?.length === 1 ? rows[0] : undefined;
}

function parseRows(text: string): string[][] | undefined {
  try {
    return parse(text, { relax_column_count: true, record_delimiter: '\n', trim: true });
  } catch {
    return undefined;
  }
}
