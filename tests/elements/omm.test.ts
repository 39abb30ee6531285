import { describe, expect, it } from 'vitest';
import type { ReadResult } from '../../src/elements/read.js';
import {
  csvFile,
  elementsOf,
  inventedSet,
  inventedSets,
  jsonFile,
  kvnFile,
  kvnMessage,
  type OmmRecord,
  ommRecord,
  readText,
  twoLineFile,
  xmlFile,
  xmlMessage,
} from './formats.js';

const FORMATS = ['json', 'csv', 'xml', 'kvn'] as const;
type Format = (typeof FORMATS)[number];

function fileOf(format: Format, records: readonly OmmRecord[]): string {
  if (format === 'json') return JSON.stringify(records);
  if (format === 'kvn') return records.map(kvnMessage).join('\n');
  if (format === 'xml') return `<ndm>\n${records.map(xmlMessage).join('')}</ndm>\n`;
  const keywords = [...new Set(records.flatMap((record) => Object.keys(record)))];
  const rows = records.map((record) => keywords.map((keyword) => record[keyword] ?? '').join(','));
  return `${keywords.join(',')}\n${rows.join('\n')}\n`;
}

const GOOD = ommRecord(inventedSet({ designator: '99777' }));

function read(
  format: Format,
  change: OmmRecord,
  options?: Parameters<typeof readText>[1],
): Promise<ReadResult> {
  return readText(fileOf(format, [{ ...ommRecord(inventedSet()), ...change }, GOOD]), options);
}

/** What was said about a changed record that stands before a good one. */
async function verdict(format: Format, change: OmmRecord): Promise<string> {
  const { sets, rejected } = await read(format, change);
  expect(sets.at(-1)?.designator).toBe('99777');
  if (rejected.length === 0) return 'used';
  expect([sets.length, rejected.length]).toEqual([1, 1]);
  return rejected[0].detail;
}

describe.each(FORMATS)('OMM in %s', (format) => {
  it('gives the sets that were written, nine digits and microseconds too', async () => {
    const sets = [
      ...inventedSets(30),
      inventedSet({ designator: '987654321', epochMs: Date.UTC(2031, 2, 2, 5, 6, 7) + 123.457 }),
    ];
    const text = { json: jsonFile, csv: csvFile, xml: xmlFile, kvn: kvnFile }[format](sets);
    const result = await readText(text);
    expect(result.rejected).toEqual([]);
    expect(result.sets.map(elementsOf)).toEqual(sets.map(elementsOf));
  });

  it('gives the same elements as two-line sets of the same objects', async () => {
    const sets = inventedSets(12);
    const omm = await readText(fileOf(format, sets.map(ommRecord)));
    const twoLine = await readText(twoLineFile(sets));
    expect(omm.sets.map((set) => ({ ...elementsOf(set), name: '' }))).toEqual(twoLine.sets.map(elementsOf));
  });

  it.each<[string, OmmRecord, string]>([
    [
      'EPOCH',
      { EPOCH: '2031-13-02T00:00:00' },
      'EPOCH is "2031-13-02T00:00:00", expected a UTC time such as 2026-01-31T12:00:00.123456 or 2026-031T12:00:00.123456',
    ],
    [
      'EPOCH without a time of day',
      { EPOCH: '2031-03-02' },
      'EPOCH is "2031-03-02", expected a UTC time such as 2026-01-31T12:00:00.123456 or 2026-031T12:00:00.123456',
    ],
    ['EPOCH of another age', { EPOCH: '1899-03-02T00:00:00' }, 'epoch is not in the years 1957 to 2099'],
    [
      'theory SGP4-XP',
      { MEAN_ELEMENT_THEORY: 'SGP4-XP' },
      'MEAN_ELEMENT_THEORY SGP4-XP is another theory than SGP4, and not supported',
    ],
    [
      'another theory',
      { MEAN_ELEMENT_THEORY: 'DSST' },
      'MEAN_ELEMENT_THEORY is "DSST", expected SGP4 or SGP/SGP4',
    ],
    ['time system', { TIME_SYSTEM: 'TAI' }, 'TIME_SYSTEM is "TAI", expected UTC'],
    ['frame', { REF_FRAME: 'EME2000' }, 'REF_FRAME is "EME2000", expected TEME'],
    ['center', { CENTER_NAME: 'MOON' }, 'CENTER_NAME is "MOON", expected EARTH'],
    ['ephemeris type', { EPHEMERIS_TYPE: 4 }, 'EPHEMERIS_TYPE is "4" (SGP4-XP), expected 0 (SGP4)'],
    ['BTERM', { BTERM: 0.02, BSTAR: '' }, 'BTERM belongs to SGP4-XP, expected BSTAR'],
    [
      'semi-major axis',
      { SEMI_MAJOR_AXIS: 6900.5, MEAN_MOTION: '' },
      'SEMI_MAJOR_AXIS instead of MEAN_MOTION: elements for SGP4 come with MEAN_MOTION',
    ],
    ['no B*', { BSTAR: '' }, 'BSTAR is missing'],
    ['no number', { NORAD_CAT_ID: '' }, 'NORAD_CAT_ID is missing'],
    ['ten digits', { NORAD_CAT_ID: 1_234_567_890 }, 'NORAD_CAT_ID is "1234567890", expected 1 to 999999999'],
    ['number zero', { NORAD_CAT_ID: 0 }, 'NORAD_CAT_ID is "0", expected 1 to 999999999'],
    [
      'text for a number',
      { INCLINATION: '53.05 degrees' },
      'INCLINATION is "53.05 degrees", expected a number',
    ],
    ['a number too large', { MEAN_MOTION: '1e999' }, 'MEAN_MOTION is "1e999", expected a number'],
    ['eccentricity', { ECCENTRICITY: 1 }, 'eccentricity 1, expected 0 to less than 1'],
    ['inclination', { INCLINATION: 180.5 }, 'inclination 180.5 deg, expected 0 to 180'],
    ['mean anomaly', { MEAN_ANOMALY: -1 }, 'mean anomaly -1 deg, expected 0 to 360'],
    ['mean motion', { MEAN_MOTION: 0 }, 'mean motion 0 rev/day, expected more than 0 and less than 18'],
    [
      'below the surface',
      { MEAN_MOTION: 17.5 },
      "SGP4 error 6 (position below the Earth's surface) at the epoch",
    ],
  ])('rejects one record alone: %s', async (_, change, detail) => {
    expect(await verdict(format, change)).toBe(detail);
  });

  it('takes SGP/SGP4, an Alpha-5 number and a missing international designator', async () => {
    const { sets } = await read(format, {
      MEAN_ELEMENT_THEORY: 'SGP/SGP4',
      NORAD_CAT_ID: 'A0007',
      OBJECT_ID: '',
    });
    expect(sets[0]).toMatchObject({ designator: '100007', internationalDesignator: '' });
  });

  it('lets a launch batch go without numbers', async () => {
    for (const number of ['', 0]) {
      const { sets } = await read(format, { NORAD_CAT_ID: number }, { batch: true });
      expect(sets.map((set) => set.designator)).toEqual(['', '99777']);
    }
  });
});

describe('OMM in JSON', () => {
  const records = inventedSets(5).map(ommRecord);
  const [first, second] = records;

  it('may be one object, one after the other, or pretty-printed, with numbers as text', async () => {
    const asText = Object.fromEntries(Object.entries(first).map(([key, value]) => [key, String(value)]));
    const texts = [JSON.stringify(first), JSON.stringify([asText], null, 2), JSON.stringify(asText)];
    const results = await Promise.all(texts.map((text) => readText(text)));
    for (const { sets } of results) expect(elementsOf(sets[0])).toEqual(elementsOf(inventedSets(1)[0]));
    const many = await readText(records.map((record) => JSON.stringify(record)).join('\n'));
    expect(many.sets.map((set) => set.source.line)).toEqual([1, 2, 3, 4, 5]);
  });

  it('may leave out what never changes', async () => {
    const { CENTER_NAME: _c, REF_FRAME: _r, TIME_SYSTEM: _t, MEAN_ELEMENT_THEORY: _m, ...bare } = first;
    expect((await readText(JSON.stringify([bare]))).sets.length).toBe(1);
  });

  it('keeps braces and quotes inside names apart from the structure', async () => {
    const name = 'KESTREL },{ "1" \\ ]';
    const { sets } = await readText(JSON.stringify([{ ...first, OBJECT_NAME: name }, second]));
    expect(sets.map((set) => set.name)).toEqual([name, 'KESTREL-2']);
  });

  it.each([0, 1])('a quote, brace or comma too few costs one record, indented by %d', async (indent) => {
    const text = JSON.stringify(records, null, indent);
    const damages: [string, RegExp, string][] = [
      ['closing quote', /KESTREL-2"/, 'KESTREL-2'],
      ['opening quote', /"KESTREL-2/, 'KESTREL-2'],
      ['closing brace', /\}(?=,\s*\{\s*"OBJECT_NAME":\s*"KESTREL-3)/, ''],
      ['opening brace', /\{(?=\s*"OBJECT_NAME":\s*"KESTREL-2)/, ''],
      ['comma', /,(?=\s*"OBJECT_ID":\s*"2031-902)/, ''],
    ];
    for (const [what, pattern, put] of damages) {
      const damaged = text.replace(pattern, put);
      expect(damaged).not.toBe(text);
      const { sets, rejected } = await readText(damaged);
      const names = sets.map((set) => set.name);
      expect([what, names]).toEqual([what, ['KESTREL-1', 'KESTREL-3', 'KESTREL-4', 'KESTREL-5']]);
      expect(rejected.length).toBe(1);
    }
  });

  it('says so when the array does not end', async () => {
    const whole = JSON.stringify(records);
    const cutBetween = await readText(whole.slice(0, whole.lastIndexOf('{')));
    expect(cutBetween.sets.length).toBe(4);
    expect(cutBetween.rejected.map((record) => record.detail)).toEqual([
      'the array is not closed with ]: the file is cut off',
    ]);
    const cutInside = await readText(whole.slice(0, -40));
    expect(cutInside.sets.length).toBe(4);
    expect(cutInside.rejected[0].source.line).toBe(5);
    expect(cutInside.rejected[0].detail).toMatch(/^not valid JSON: \w+ at character \d+$/);
  });

  it('rejects what is no object, and values that are neither text nor number', async () => {
    const { sets, rejected } = await readText(
      `[${JSON.stringify(first)}, 5, "a", ${JSON.stringify({ ...second, BSTAR: { value: 1 } })}]`,
    );
    expect(sets.length).toBe(1);
    expect(rejected.map((record) => record.detail)).toEqual([
      '"5,\\"a\\"" stands outside of any object, expected { "EPOCH": ... }',
      'BSTAR is an object, expected text',
    ]);
    expect(rejected.map((record) => [record.source.line, record.designator])).toEqual([
      [2, ''],
      [3, '99002'],
    ]);
  });

  it('gives up a record without an end after 64 KiB, and finds the next', async () => {
    const filler = `"x": [${'1,'.repeat(50_000)}1]`;
    const { sets, rejected } = await readText(
      `[{"a": {${filler}}, ${JSON.stringify(first)}, ${JSON.stringify(second)}]`,
    );
    expect(sets.map((set) => set.name)).toEqual(['KESTREL-1', 'KESTREL-2']);
    expect(rejected.map((record) => record.detail)[0]).toBe(
      'not valid JSON: no closing brace within 65537 bytes',
    );
  });
});

describe('OMM in CSV', () => {
  const sets = inventedSets(4);
  const lines = csvFile(sets).trimEnd().split('\n');

  it('may have its columns in any order, quotes, CRLF, blank lines, and the header again', async () => {
    const quoted = lines.map((line) =>
      line
        .split(',')
        .reverse()
        .map((cell) => `"${cell}"`)
        .join(','),
    );
    const text = ['', ...quoted.slice(0, 3), lines[0], ...lines.slice(3)].join('\r\n');
    const result = await readText(text);
    expect(result.rejected).toEqual([]);
    expect(result.sets.map(elementsOf)).toEqual(sets.map(elementsOf));
    expect(result.sets.map((set) => set.source.line)).toEqual([3, 4, 6, 7]);
  });

  it('a name may hold a comma in quotes', async () => {
    const { sets: read } = await readText(
      `${lines[0]}\n${lines[1].replace('KESTREL-1', '"KESTREL, ""A"""')}\n`,
    );
    expect(read[0].name).toBe('KESTREL, "A"');
  });

  it('a faulty row costs one set: a stray quote, a value too many, a value too few', async () => {
    const rows = [
      lines[0],
      lines[1].replace('KESTREL', '"KESTREL'),
      `${lines[2]},7`,
      lines[3].slice(lines[3].indexOf(',') + 1),
      lines[4],
    ];
    const result = await readText(`${rows.join('\n')}\n`);
    expect(result.sets.map((set) => set.name)).toEqual(['KESTREL-4']);
    expect(result.rejected.map((record) => [record.source.line, record.detail])).toEqual([
      [2, 'quotes that do not close, expected one line a set'],
      [3, '22 values, expected 21 as in the header'],
      [4, '20 values, expected 21 as in the header'],
    ]);
  });

  it('quotes that would close in a later row cost those two rows only', async () => {
    const rows = [
      lines[0],
      lines[1],
      lines[2].replace('KESTREL-2', '"KESTREL-2'),
      lines[3].replace('KESTREL-3', 'KESTREL-3"'),
      lines[4],
    ];
    const result = await readText(`${rows.join('\n')}\n`);
    expect(result.sets.map((set) => set.name)).toEqual(['KESTREL-1', 'KESTREL-4']);
    expect(result.rejected.map((record) => record.source.line)).toEqual([3, 4]);
  });

  it('a header that names a keyword twice is refused, with all that hangs on it', async () => {
    const header = lines[0].replace('REV_AT_EPOCH', 'EPOCH');
    const result = await readText(`${lines.join('\n')}\n${header}\n${lines[1]}\n`);
    expect(result.sets.length).toBe(4);
    expect(result.rejected.map((record) => record.detail)).toEqual([
      'the header names "EPOCH" twice',
      'no header line of OMM keywords before it',
    ]);
  });
});

describe('OMM in KVN', () => {
  const record = ommRecord(inventedSet());

  it('may carry units, comments and blank lines', async () => {
    const units = kvnMessage({
      ...record,
      MEAN_MOTION: '15.0225 [rev/day]',
      INCLINATION: '53.05 [deg]',
      BSTAR: '1e-4 [1/ER]',
    });
    const { sets } = await readText(units.replace('OBJECT_NAME', '\nCOMMENT a test\n\nOBJECT_NAME'));
    expect(sets[0]).toMatchObject({ meanMotionRevPerDay: 15.0225, inclinationDeg: 53.05, bstar: 1e-4 });
    expect(sets[0].source.line).toBe(1);
  });

  it.each<[string, (message: string) => string, string]>([
    ['a wrong unit', (m) => m.replace('= 53.05', '= 0.9259 [rad]'), 'INCLINATION is in "rad", expected deg'],
    [
      'a unit where none is',
      (m) => m.replace('= 0.0012\n', '= 0.0012 [deg]\n'),
      'ECCENTRICITY is in "deg", expected no unit',
    ],
    [
      'a keyword twice',
      (m) => `${m}EPOCH = 2031-03-02T00:00:00\n`,
      'EPOCH is given again in line 25, expected once a message',
    ],
    [
      'no assignment',
      (m) => m.replace('REF_FRAME =', 'REF_FRAME'),
      'line 7 is "REF_FRAME TEME", expected KEYWORD = value',
    ],
    ['no theory', (m) => m.replace('MEAN_ELEMENT_THEORY = SGP4\n', ''), 'MEAN_ELEMENT_THEORY is missing'],
    ['no time system', (m) => m.replace('TIME_SYSTEM = UTC\n', ''), 'TIME_SYSTEM is missing'],
    [
      'another message',
      (m) => m.replace('CCSDS_OMM_VERS', 'CCSDS_OEM_VERS'),
      'this is a CCSDS OEM message, expected orbit mean elements (OMM)',
    ],
  ])('rejects %s', async (_, change, detail) => {
    const { sets, rejected } = await readText(change(kvnMessage(record)) + kvnMessage(GOOD));
    expect(sets.map((set) => set.designator)).toEqual(['99777']);
    expect(rejected.map((unused) => [unused.source.line, unused.detail])).toEqual([[1, detail]]);
  });

  it('rejects an ephemeris among the messages as one record', async () => {
    const ephemeris =
      'CCSDS_OEM_VERS = 3.0\nMETA_START\nOBJECT_NAME = KESTREL-9\nMETA_STOP\n2031-03-02T00:00:00 7000 0 0 0 7.5 0\n';
    const { sets, rejected } = await readText(kvnMessage(record) + ephemeris + kvnMessage(GOOD));
    expect(sets.length).toBe(2);
    expect(rejected.map((unused) => [unused.source.line, unused.detail])).toEqual([
      [25, 'this is a CCSDS OEM message, expected orbit mean elements (OMM)'],
    ]);
  });
});

describe('OMM in XML', () => {
  const record = ommRecord(inventedSet());

  it('may be a single omm, carry units, entities and comments', async () => {
    const text = xmlMessage({ ...record, OBJECT_NAME: 'KESTREL &amp; CO' })
      .replace('<MEAN_MOTION>', '<MEAN_MOTION units="rev/day">')
      .replace('<body>', '<body><!-- a test -->');
    const { sets } = await readText(`<?xml version="1.0"?>\n<!-- <omm> -->\n${text}`);
    expect(sets[0]).toMatchObject({ name: 'KESTREL & CO', meanMotionRevPerDay: 15.0225 });
    expect(sets[0].source.line).toBe(3);
  });

  it.each<[string, (message: string) => string, string]>([
    [
      'a wrong unit',
      (m) => m.replace('<INCLINATION>', '<INCLINATION units="rad">'),
      'INCLINATION is in "rad", expected deg',
    ],
    [
      'an element twice',
      (m) => m.replace('<EPOCH>', '<EPOCH>x</EPOCH><EPOCH>'),
      '<EPOCH> stands more than once, expected once',
    ],
    [
      'two segments',
      (m) => m.replace('</segment>', '</segment><segment></segment>'),
      '<segment> stands 2 times, expected once',
    ],
    ['no metadata', (m) => m.replaceAll('metadata', 'metadatum'), '<metadata> is missing or empty'],
    [
      'a wrong end tag',
      (m) => m.replace('</EPOCH>', '</EPOK>'),
      "not valid XML in line 12: Expected closing tag 'EPOCH' instead of closing tag 'EPOK'.",
    ],
    ['no end tag', (m) => m.replace('</omm>', ''), 'no </omm> before the next <omm>'],
    ['no frame', (m) => m.replace('<REF_FRAME>TEME</REF_FRAME>\n', ''), 'REF_FRAME is missing'],
  ])('rejects %s', async (_, change, detail) => {
    const { sets, rejected } = await readText(
      `<ndm>\n${change(xmlMessage(record))}${xmlMessage(GOOD)}</ndm>\n`,
    );
    expect(sets.map((set) => set.designator)).toEqual(['99777']);
    expect(rejected.map((unused) => [unused.source.line, unused.detail])).toEqual([[2, detail]]);
  });

  it('rejects other messages and stray text as one record a run, and a file that is cut off', async () => {
    const { sets, rejected } = await readText(
      `<ndm>\n<MESSAGE_ID>7</MESSAGE_ID>\n${xmlMessage(record)}<oem><body>1 2 3</body></oem>\nstray\n${xmlMessage(GOOD)}`,
    );
    expect(sets.length).toBe(2);
    expect(rejected.map((unused) => unused.detail)).toEqual([
      '<oem> is no orbit mean-elements message, expected <omm>',
      'the root element is not closed: the file is cut off',
    ]);
    const comment = await readText(`<ndm>\n<COMMENT>open\n${xmlMessage(GOOD)}</ndm>`);
    expect(comment.rejected.map((unused) => unused.detail)).toEqual([
      '<COMMENT> before this line is not closed',
    ]);
    const cut = await readText(`<ndm>${xmlMessage(GOOD)}${xmlMessage(record).slice(0, 500)}`);
    expect(cut.rejected.map((unused) => unused.detail)).toEqual([
      'no </omm>: the file is cut off',
      'the root element is not closed: the file is cut off',
    ]);
  });
});
