import { Writable } from 'node:stream';
import { parse } from 'csv-parse/sync';

/** The text that a writer puts into its stream. */
export async function collect(write: (output: Writable) => Promise<unknown>): Promise<string> {
  const chunks: Buffer[] = [];
  const output = new Writable({
    write(chunk: Buffer, _encoding, done) {
      chunks.push(chunk);
      done();
    },
  });
  await write(output);
  return new TextDecoder('utf-8', { fatal: true, ignoreBOM: true }).decode(Buffer.concat(chunks));
}

/** Records of strict RFC 4180 text: CRLF, no stray quotes, as many cells as the header, nothing trimmed. */
export function strictCsv(text: string): string[][] {
  return parse(text, {
    delimiter: ',',
    quote: '"',
    escape: '"',
    record_delimiter: '\r\n',
    relax_quotes: false,
    relax_column_count: false,
    skip_empty_lines: false,
    bom: false,
    trim: false,
  });
}
