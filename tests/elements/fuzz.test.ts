import { writeFileSync } from 'node:fs';
import { gzipSync } from 'node:zlib';
import { describe, expect, it } from 'vitest';
import { type Decoder, isUnused, type ReadOptions, type SetOrRejection } from '../../src/elements/decoder.js';
import { lineSplitter } from '../../src/elements/lines.js';
import { ommCsvDecoder } from '../../src/elements/omm-csv.js';
import { ommJsonDecoder } from '../../src/elements/omm-json.js';
import { ommKvnDecoder } from '../../src/elements/omm-kvn.js';
import { ommXmlDecoder } from '../../src/elements/omm-xml.js';
import { type ReadResult, readElementFiles } from '../../src/elements/read.js';
import { twoLineDecoder } from '../../src/elements/two-line.js';
import { lineGrouper } from '../../src/elements/two-line-groups.js';
import { InputError } from '../../src/input-error.js';
import { type Random, seededRandom } from '../synthetic/random.js';
import {
  csvFile,
  inFolder,
  inventedSets,
  jsonFile,
  kvnFile,
  threeLineFile,
  twoLineFile,
  xmlFile,
} from './formats.js';

const COUNT = 8;
const SETS = inventedSets(COUNT);

const FORMATS: [name: string, text: string, decoder: (file: string, options: ReadOptions) => Decoder][] = [
  ['two-line', twoLineFile(SETS), twoLineDecoder],
  ['three-line', threeLineFile(SETS), twoLineDecoder],
  ['JSON', jsonFile(SETS), ommJsonDecoder],
  ['indented JSON', jsonFile(SETS, 2), ommJsonDecoder],
  ['CSV', csvFile(SETS), ommCsvDecoder],
  ['XML', xmlFile(SETS), ommXmlDecoder],
  ['KVN', kvnFile(SETS), ommKvnDecoder],
];

const NASTY = [
  'NaN',
  '1e999',
  '-1e-400',
  '',
  '-',
  '+',
  '.',
  '"',
  '""',
  "'",
  '<',
  '>',
  '&',
  '&#x0;',
  ']]>',
  '<!--',
  '{',
  '}',
  '[',
  ']',
  ',',
  ';',
  '=',
  '#',
  '\\',
  '\u2028',
  '\uFEFF',
  '\u001b[2J',
  'null',
  '9'.repeat(400),
  ' '.repeat(500),
  '__proto__',
  'A0000',
  '0 ',
  '1 ',
  '2 ',
  '\t',
];

/** One change to the text, anywhere. */
function changed(text: string, random: Random): string {
  const at = random.integer(text.length + 1);
  const lines = text.split('\n');
  const line = random.integer(lines.length);
  const kinds: (() => string)[] = [
    () => text.slice(0, at) + String.fromCharCode(1 + random.integer(255)) + text.slice(at + 1),
    () => text.slice(0, at) + text.slice(at + 1 + random.integer(3)),
    () => text.slice(0, at) + random.choice(NASTY) + text.slice(at),
    () => text.slice(0, at),
    () => text.slice(at),
    () => lines.toSpliced(line, 1).join('\n'),
    () => lines.toSpliced(line, 0, lines[random.integer(lines.length)]).join('\n'),
    () => lines.with(line, lines[line].slice(0, random.integer(80))).join('\n'),
    () =>
      lines
        .toSpliced(
          line,
          0,
          random.choice(['prose', '', '# comment', '1 ', `2 ${'9'.repeat(70)}`, '{', '</omm>']),
        )
        .join('\n'),
    () => text.replace(numberNear(text, at), random.choice(NASTY)),
    () => text.replace(/(\d)(\d)/, '$2$1'),
    () => text.slice(at) + text.slice(0, at),
    () => text.slice(0, at) + text.slice(at).replaceAll('\n', random.choice(['\r\n', '\r', '\n\n', ' '])),
    () => [...lines].sort(() => random.uniform() - 0.5).join('\n'),
  ];
  return random.choice(kinds)();
}

function numberNear(text: string, at: number): string {
  return /\d[\d.]*/.exec(text.slice(at))?.[0] ?? '0';
}

/** The bytes of a text as a file may hold them, whole or damaged. */
function packed(text: string, random: Random): Uint8Array {
  const utf8 = Buffer.from(text);
  const zipped = gzipSync(utf8, { level: 1 });
  const at = random.integer(utf8.length + 1);
  const kinds: (() => Uint8Array)[] = [
    () => zipped,
    () => zipped.subarray(0, random.integer(zipped.length)),
    () => {
      zipped[random.integer(zipped.length)] ^= 1 << random.integer(8);
      return zipped;
    },
    () => Buffer.concat([zipped, utf8.subarray(at)]),
    () => Buffer.concat([utf8.subarray(0, at), Buffer.alloc(1 + random.integer(3)), utf8.subarray(at)]),
    () => Buffer.from(`\uFEFF${text}`, 'utf16le').subarray(0, random.integer(2 * text.length)),
    () => Buffer.from(text, 'utf16le'),
    () => Buffer.from(text, 'latin1'),
    () => Uint8Array.from({ length: random.integer(2000) }, () => random.integer(256)),
    () => Uint8Array.from({ length: random.integer(2000) }, () => 1 + random.integer(255)),
  ];
  return random.choice(kinds)();
}

/** Reads a file that may be anything; `undefined` if it was refused as a whole, properly. */
async function readAnything(path: string): Promise<ReadResult | undefined> {
  let result: ReadResult;
  try {
    result = await readElementFiles([path]);
  } catch (error) {
    if (!(error instanceof InputError) || /[\n\r]/.test(error.message)) throw error;
    return undefined;
  }
  const [file] = result.files;
  if (file.read !== result.sets.length + result.rejected.length || file.rejected !== result.rejected.length) {
    throw new Error(`the accounts do not add up: ${JSON.stringify(file)}`);
  }
  checkRecords([...result.sets, ...result.rejected], path);
  return result;
}

function checkRecords(records: readonly SetOrRejection[], file: string): void {
  for (const record of records) {
    if (record.source.file !== file || !(record.source.line >= 1))
      throw new Error(JSON.stringify(record.source));
    if (isUnused(record)) {
      if (record.detail === '' || /\n/.test(record.detail)) throw new Error(`detail ${record.detail}`);
      continue;
    }
    const { source: _, name, designator, internationalDesignator, epochMs, ...numbers } = record;
    const sound =
      /^[1-9]\d{0,8}$/.test(designator) &&
      !/\p{Cc}/u.test(name + internationalDesignator) &&
      Object.values({ epochMs, ...numbers }).every(Number.isFinite) &&
      numbers.eccentricity >= 0 &&
      numbers.eccentricity < 1 &&
      numbers.inclinationDeg <= 180;
    if (!sound) throw new Error(JSON.stringify(record));
  }
}

function decodeAll(decoder: Decoder, bytes: Buffer, nextLength: () => number): SetOrRejection[] {
  const records: SetOrRejection[] = [];
  for (let at = 0; at < bytes.length; ) {
    const length = nextLength();
    records.push(...decoder.push(bytes.subarray(at, at + length)));
    at += length;
  }
  return [...records, ...decoder.end()];
}

describe.each(FORMATS)('whatever is done to %s', (name, text, decoderOf) => {
  it('reading ends well: every record is used or rejected, or the file is refused', async () => {
    const random = seededRandom(20_310_302 + name.length);
    let refused = 0;
    let used = 0;
    await inFolder({}, async (path) => {
      const rounds = name === 'XML' ? 150 : 250;
      for (let round = 0; round < rounds; round++) {
        let damaged = text;
        for (let i = 1 + random.integer(3); i > 0; i--) damaged = changed(damaged, random);
        const content = random.uniform() < 0.3 ? packed(damaged, random) : damaged;
        writeFileSync(path('file'), content);
        const started = performance.now();
        const result = await readAnything(path('file'));
        expect(performance.now() - started).toBeLessThan(3000);
        if (result === undefined) refused += 1;
        else used += result.sets.length;
      }
      expect(refused).toBeGreaterThan(rounds / 50);
      expect(used).toBeGreaterThan(rounds);
    });
  });

  it('the borders of the chunks do not matter', () => {
    const random = seededRandom(7 + name.length);
    for (let round = 0; round < 30; round++) {
      const bytes = Buffer.from(round === 0 ? text : changed(text, random));
      const whole = decodeAll(decoderOf('file', {}), bytes, () => bytes.length + 1);
      const pieces = decodeAll(
        decoderOf('file', {}),
        bytes,
        () => 1 + random.integer(round % 2 === 0 ? 3 : 700),
      );
      expect(pieces).toEqual(whole);
    }
  });

  it('one changed character costs two sets at most, and none vanishes', () => {
    const random = seededRandom(99 + name.length);
    const lowest = { used: COUNT, read: COUNT };
    for (let round = 0; round < 250; round++) {
      const at = random.integer(text.length);
      const damaged = text.slice(0, at) + String.fromCharCode(33 + random.integer(94)) + text.slice(at + 1);
      const records = decodeAll(decoderOf('file', {}), Buffer.from(damaged), () => 65_536);
      const used = records.filter((record) => !isUnused(record)).length;
      // A damaged header of a table takes all its rows along, but not without a word.
      if (name !== 'CSV' || at > text.indexOf('\n')) lowest.used = Math.min(lowest.used, used);
      lowest.read = Math.min(lowest.read, records.length);
    }
    expect(lowest.used).toBeGreaterThanOrEqual(COUNT - 2);
    expect(lowest.read).toBeGreaterThanOrEqual(COUNT - 1);
  });
});

it('every line of a two-line file is in exactly one set or stray group, in order', () => {
  const random = seededRandom(424_242);
  const good = threeLineFile(SETS).trimEnd().split('\n');
  const soup = [
    ...good,
    ...good,
    'prose',
    '',
    '   ',
    '# comment',
    '1',
    '2 99',
    '0 ',
    '1 99001U',
    'x'.repeat(69),
    '7'.repeat(69),
  ];
  for (let round = 0; round < 1000; round++) {
    const lines = Array.from({ length: random.integer(60) }, () => random.choice(soup));
    const splitter = lineSplitter();
    const grouper = lineGrouper();
    const groups = [
      ...grouper.push(splitter.push(Buffer.from(lines.join('\n')))),
      ...grouper.push(splitter.end()),
      ...grouper.end(),
    ];
    const meant = lines.flatMap((line, i) => (line.trim() === '' || line.startsWith('#') ? [] : [i + 1]));
    const found: number[] = [];
    for (const group of groups) {
      if (group.kind === 'set') {
        const { name, one, two } = group;
        found.push(...(name === undefined ? [] : [name.number]), one.number, two.number);
      } else {
        const from = meant.indexOf(group.first);
        found.push(...meant.slice(from, from + group.count));
        const texts = group.text.split('\n');
        expect(texts.length).toBe(group.count > 21 ? texts.length : group.count);
        expect(texts[0]).toBe(lines[group.first - 1]);
      }
    }
    expect(found).toEqual(meant);
  }
});

it('deep nesting, long lines and long runs end in time', async () => {
  const long: string[] = [
    '['.repeat(200_000),
    `[${'{"a":'.repeat(100_000)}`,
    `[${'{'.repeat(300_000)}`,
    `[{"a":"${'\\"'.repeat(200_000)}`,
    `[{}${'}'.repeat(200_000)}`,
    `[{"a":1}${' '.repeat(300_000)}x`,
    `<ndm>${'<a>'.repeat(60_000)}`,
    `<ndm>${'<omm>'.repeat(100_000)}`,
    `<omm>${'<a>'.repeat(60_000)}</omm>`,
    `<!--${'-'.repeat(300_000)}`,
    `<ndm>${'<'.repeat(300_000)}`,
    `<ndm>${'<!--'.repeat(100_000)}`,
    `<ndm>${'<COMMENT>'.repeat(100_000)}`,
    `CCSDS_OMM_VERS = ${' '.repeat(60_000)}[${'['.repeat(60_000)}`,
    `CCSDS_OMM_VERS = 3.0\n${'A'.repeat(300_000)}`,
    `EPOCH,MEAN_MOTION,BSTAR\n${','.repeat(300_000)}`,
    `EPOCH,MEAN_MOTION,BSTAR\n${'"a""'.repeat(15_000)}`,
    `1 ${'9'.repeat(300_000)}`,
    '1 99001U\n'.repeat(30_000),
    '2 99001 \n'.repeat(30_000),
    ' \n'.repeat(200_000),
    'x\n'.repeat(200_000),
  ];
  for (const text of long) {
    const started = performance.now();
    await inFolder({ file: text }, async (path) => expect(await readAnything(path('file'))).toBeUndefined());
    expect([text.slice(0, 40), performance.now() - started < 5000]).toEqual([text.slice(0, 40), true]);
  }
});
