import { describe, expect, it } from 'vitest';
import { elementLineChecksum } from '../../src/elements/two-line.js';
import { checksum, toThreeLine, toTwoLine } from '../synthetic/two-line.js';
import { elementsOf, inventedSet, inventedSets, readText, threeLineFile, twoLineFile } from './formats.js';

const GOOD = inventedSet({ designator: '99777', name: '' });
const [ONE, TWO] = toTwoLine(inventedSet());

/** Puts text at a column (from 1) and makes the checksum right again. */
function withField(line: string, column: number, text: string): string {
  const changed = line.slice(0, column - 1) + text + line.slice(column - 1 + text.length);
  return changed.slice(0, 68) + checksum(changed);
}

/** Reads a set beside a good one, and returns what was said about it. */
async function verdict(...lines: string[]): Promise<string> {
  const { sets, rejected } = await readText(`${lines.join('\n')}\n${twoLineFile([GOOD])}`);
  expect(sets.at(-1)?.designator).toBe('99777');
  if (sets.length === 2) return 'used';
  expect(sets.length).toBe(1);
  expect(rejected.length).toBe(1);
  expect(rejected[0].source.line).toBe(1);
  expect(rejected[0].source.text).toBe(lines.join('\n'));
  return rejected[0].detail;
}

describe('two-line sets', () => {
  it('come back as they were written, in two and three lines, near-earth and deep-space', async () => {
    const sets = inventedSets(60);
    const three = await readText(threeLineFile(sets));
    expect(three.sets.map(elementsOf)).toEqual(sets.map(elementsOf));
    const two = await readText(twoLineFile(sets));
    expect(two.sets.map(elementsOf)).toEqual(sets.map((set) => ({ ...elementsOf(set), name: '' })));
    expect(three.sets[1].source.line).toBe(4);
    expect(three.sets[1].source.text).toBe(toThreeLine(sets[1]).join('\n'));
  });

  it.each([
    ['LF', '\n'],
    ['CRLF', '\r\n'],
    ['CR', '\r'],
  ])('may end their lines in %s', async (_, end) => {
    const sets = inventedSets(5);
    const result = await readText(threeLineFile(sets).replaceAll('\n', end));
    expect(result.sets.map(elementsOf)).toEqual(sets.map(elementsOf));
    expect(result.sets.map((set) => set.source.line)).toEqual([1, 4, 7, 10, 13]);
  });

  it('may be mixed, with comments, blank lines and text after column 69', async () => {
    const text = [
      '# morning delivery',
      '',
      'KESTREL-1   ',
      '# about the first',
      ONE,
      `${TWO}      0.0   1440.0`,
      '   ',
      '0 KESTREL 2',
      ...toTwoLine(inventedSet({ designator: '99002' })),
      ...toTwoLine(inventedSet({ designator: '99003' })),
    ].join('\n');
    const { sets, rejected } = await readText(text);
    expect(rejected).toEqual([]);
    expect(sets.map((set) => [set.designator, set.name, set.source.line])).toEqual([
      ['99001', 'KESTREL-1', 3],
      ['99002', 'KESTREL 2', 8],
      ['99003', '', 11],
    ]);
  });

  it('resolve Alpha-5 numbers, where I and O are not used', async () => {
    const numbers = ['100000', '179999', '180000', '229999', '230000', '339999'];
    const { sets } = await readText(twoLineFile(numbers.map((designator) => inventedSet({ designator }))));
    expect(sets.map((set) => set.designator)).toEqual(numbers);
    expect(sets[2].source.text).toContain('1 J0000U');
    for (const letter of ['I', 'O', 'a', '*']) {
      const bad = `${letter}0001`;
      expect(await verdict(withField(ONE, 3, bad), withField(TWO, 3, bad))).toBe(
        `line 1, columns 3-7: catalog number "${bad}", expected 1 to 99999 or Alpha-5`,
      );
    }
  });

  it('may pad numbers with blanks or zeros and write plus signs', async () => {
    const one = withField(withField(ONE, 3, '   12'), 34, '+.00000153 +00000-0 +47668-4');
    const two = withField(
      withField(TWO, 3, '00012'),
      9,
      '086.3994 021.7028 0002288   5.1644  74.9812 14.34219863',
    );
    const { sets } = await readText(`${one}\n${two}\n`);
    expect(sets[0]).toMatchObject({
      designator: '12',
      bstar: 0.47668e-4,
      inclinationDeg: 86.3994,
      rightAscensionDeg: 21.7028,
      eccentricity: 0.0002288,
      argumentOfPerigeeDeg: 5.1644,
      meanAnomalyDeg: 74.9812,
      meanMotionRevPerDay: 14.34219863,
    });
    const blanks = withField(TWO, 27, '  12345');
    expect((await readText(`${ONE}\n${blanks}\n`)).sets[0].eccentricity).toBe(0.0012345);
  });

  it('read the year 57 as 1957 and 56 as 2056, and every digit of the day', async () => {
    for (const [digits, year] of [
      ['57', 1957],
      ['99', 1999],
      ['00', 2000],
      ['56', 2056],
    ] as const) {
      const { sets } = await readText(`${withField(ONE, 19, `${digits}001.00000001`)}\n${TWO}\n`);
      expect(sets[0].epochMs).toBeCloseTo(Date.UTC(year, 0, 1) + 0.864, 3);
    }
    const { sets } = await readText(`${withField(ONE, 19, '28366.99999999')}\n${TWO}\n`);
    expect(sets[0].epochMs).toBeCloseTo(Date.UTC(2029, 0, 1) - 0.864, 3);
  });

  it('count a minus as 1 and a plus as 0 in the checksum', () => {
    expect(elementLineChecksum('1 - 2 + 3 A .')).toBe(7);
    expect(elementLineChecksum(`${'9'.repeat(68)}9`)).toBe((9 * 68) % 10);
  });
});

describe('a faulty two-line set is rejected with its reason', () => {
  const wrongDigit = (line: string) => `${line.slice(0, 68)}${(Number(line[68]) + 1) % 10}`;

  it.each<[string, string[], string]>([
    [
      'checksum of line 1',
      [wrongDigit(ONE), TWO],
      `line 1, column 69: checksum "${(Number(ONE[68]) + 1) % 10}", expected ${ONE[68]}`,
    ],
    [
      'checksum of line 2',
      [ONE, wrongDigit(TWO)],
      `line 2, column 69: checksum "${(Number(TWO[68]) + 1) % 10}", expected ${TWO[68]}`,
    ],
    ['no checksum', [ONE, TWO.slice(0, 68)], `line 2 has no checksum in column 69, expected ${TWO[68]}`],
    ['short line', [ONE.slice(0, 40), TWO], 'line 1 has 40 characters, expected 69'],
    ['text that touches column 69', [`${ONE}7`, TWO], 'line 1, column 70: "7", expected the end or a blank'],
    [
      'other object on line 2',
      [ONE, withField(TWO, 3, '99002')],
      'line 1 is of catalog number "99001", line 2 of "99002", expected the same on both',
    ],
    [
      'number zero',
      [withField(ONE, 3, '00000'), withField(TWO, 3, '00000')],
      'line 1, columns 3-7: catalog number "00000", expected 1 to 99999 or Alpha-5',
    ],
    [
      'blank number',
      [withField(ONE, 3, '     '), withField(TWO, 3, '     ')],
      'line 1, columns 3-7: catalog number "     ", expected 1 to 99999 or Alpha-5',
    ],
    ['shifted field', [ONE, withField(TWO, 8, '0')], 'line 2, column 8: "0", expected a blank'],
    ['inclination', [ONE, withField(TWO, 9, '180.0001')], 'inclination 180.0001 deg, expected 0 to 180'],
    [
      'negative angle',
      [ONE, withField(TWO, 18, ' -0.1000')],
      'right ascension of the ascending node -0.1 deg, expected 0 to 360',
    ],
    [
      'argument of perigee',
      [ONE, withField(TWO, 35, '360.0001')],
      'argument of perigee 360.0001 deg, expected 0 to 360',
    ],
    ['mean anomaly', [ONE, withField(TWO, 44, '999.0000')], 'mean anomaly 999 deg, expected 0 to 360'],
    [
      'mean motion zero',
      [ONE, withField(TWO, 53, ' 0.00000000')],
      'mean motion 0 rev/day, expected more than 0 and less than 18',
    ],
    [
      'mean motion high',
      [ONE, withField(TWO, 53, '18.00000000')],
      'mean motion 18 rev/day, expected more than 0 and less than 18',
    ],
    [
      'letters in a number',
      [ONE, withField(TWO, 9, ' 53.O500')],
      'line 2, columns 9-16: inclination " 53.O500", expected a decimal number',
    ],
    [
      'a comma for the point',
      [ONE, withField(TWO, 53, '15,02250000')],
      'line 2, columns 53-63: mean motion "15,02250000", expected a decimal number',
    ],
    [
      'eccentricity with a point',
      [ONE, withField(TWO, 27, '.001200')],
      'line 2, columns 27-33: eccentricity ".001200", expected seven digits',
    ],
    [
      'eccentricity with a gap',
      [ONE, withField(TWO, 27, '00 2000')],
      'line 2, columns 27-33: eccentricity "00 2000", expected seven digits',
    ],
    [
      'day zero',
      [withField(ONE, 21, '000.50000000'), TWO],
      'line 1, columns 21-32: epoch day "000.50000000", expected 1 to less than 366 in 2031',
    ],
    [
      'day 366 of a common year',
      [withField(ONE, 21, '366.00000000'), TWO],
      'line 1, columns 21-32: epoch day "366.00000000", expected 1 to less than 366 in 2031',
    ],
    [
      'epoch year',
      [withField(ONE, 19, 'X1'), TWO],
      'line 1, columns 19-20: epoch year "X1", expected two digits',
    ],
    [
      'B*',
      [withField(ONE, 54, ' 1234X-3'), TWO],
      'line 1, columns 54-61: B* " 1234X-3", expected a number such as " 12345-3"',
    ],
    [
      'SGP4-XP',
      [withField(ONE, 63, '4'), TWO],
      'line 1, column 63: ephemeris type 4 is SGP4-XP, expected 0 (SGP4)',
    ],
    [
      'other ephemeris type',
      [withField(ONE, 63, '2'), TWO],
      'line 1, column 63: ephemeris type "2", expected 0 (SGP4) or blank',
    ],
    [
      'below the surface at the epoch',
      [ONE, withField(TWO, 53, '17.50000000')],
      "SGP4 error 6 (position below the Earth's surface) at the epoch",
    ],
    ['line 2 of nothing', [TWO], 'line 2 without a line 1 before it'],
    ['line 1 of nothing', ['KESTREL-1', ONE], 'line 1 without a line 2 after it'],
    [
      'wrong line number 1',
      [`3${ONE.slice(1)}`, TWO],
      'line 2 without a line 1 before it (instead a line of other text)',
    ],
    ['wrong line number 2', [ONE, `7${TWO.slice(1)}`], 'line 1 followed by a line that is no line 2'],
    ['line 2 cut short', [ONE, '2 99'], 'line 1 followed by a line that is no line 2'],
  ])('%s', async (_, lines, detail) => {
    expect(await verdict(...lines)).toBe(detail);
  });

  it('names the object where it can be read', async () => {
    const { rejected } = await readText(
      `${wrongDigit(ONE)}\n${TWO}\n${TWO}\n${ONE}\nprose\n${twoLineFile([GOOD, GOOD])}`,
    );
    expect(rejected.map((record) => record.designator)).toEqual(['99001', '99001', '99001']);
  });

  it('a decay long after the epoch is no fault', async () => {
    const { sets } = await readText(`${withField(ONE, 54, ' 99999+0')}\n${TWO}\n`);
    expect(sets[0].bstar).toBe(0.99999);
  });
});

describe('lines that are no set', () => {
  it('count as one record a run, and cost no set around them', async () => {
    const text = `${twoLineFile([GOOD])}first line of prose\nsecond\n\nthird\nKESTREL-1\n${ONE}\n${TWO}\nlast words\n`;
    const { sets, rejected, files } = await readText(text);
    expect(sets.map((set) => set.name)).toEqual(['', 'KESTREL-1']);
    expect(rejected.map((record) => [record.source.line, record.source.text, record.detail])).toEqual([
      [
        3,
        'first line of prose\nsecond\nthird',
        '"first line of prose\\nsecond\\nthird": 3 lines that are not part of an element set',
      ],
      [10, 'last words', '"last words": not part of an element set'],
    ]);
    expect(files[0]).toMatchObject({ read: 4, rejected: 2 });
  });

  it('a damaged element line never becomes the name of the next object', async () => {
    const damaged = [`9${TWO.slice(1)}`, TWO.slice(0, 5), '2', '1 99001'];
    for (const line of damaged) {
      const { sets, rejected } = await readText(`${ONE}\n${line}\n${twoLineFile([GOOD])}`);
      expect(sets.map((set) => [set.designator, set.name])).toEqual([['99777', '']]);
      expect(rejected.length).toBe(1);
    }
  });

  it('a set whose line 2 was lost does not take the next one with it', async () => {
    const { sets, rejected } = await readText(`A\n${ONE}\nB\n${toTwoLine(GOOD).join('\n')}\n`);
    expect(sets.map((set) => set.name)).toEqual(['B']);
    expect(rejected.map((record) => record.source.text)).toEqual([`A\n${ONE}`]);
  });

  it('names lose control characters, the source keeps them', async () => {
    const { sets } = await readText(`KES\u001b[31mTREL\u0007\t 1\n${ONE}\n${TWO}\n`);
    expect(sets[0].name).toBe('KES [31mTREL 1');
    expect(sets[0].source.text.startsWith('KES\u001b[31mTREL\u0007\t 1\n')).toBe(true);
  });

  it('names in Latin-1 keep their letters', async () => {
    const { sets } = await readText(Buffer.from(`MÖWE\n${ONE}\n${TWO}\n`, 'latin1'));
    expect(sets[0].name).toBe('MÖWE');
  });
});

describe('a launch batch', () => {
  it.each(['00000', '     ', '    0'])('may have the catalog number "%s"', async (number) => {
    const lines = [withField(ONE, 3, number), withField(TWO, 3, number)];
    const { sets } = await readText(`FIRST\n${lines.join('\n')}\nSECOND\n${lines.join('\n')}\n`, {
      batch: true,
    });
    expect(sets.map((set) => [set.designator, set.name])).toEqual([
      ['', 'FIRST'],
      ['', 'SECOND'],
    ]);
  });

  it('keeps numbers where there are some, and every other check', async () => {
    const text = `${ONE}\n${TWO}\n${ONE}\n${TWO.slice(0, 68)}9\n${ONE}\n${withField(TWO, 3, '00000')}\n`;
    const { sets, rejected } = await readText(text, { batch: true });
    expect(sets.map((set) => set.designator)).toEqual(['99001']);
    expect(rejected.map((record) => record.detail)).toEqual([
      `line 2, column 69: checksum "9", expected ${TWO[68]}`,
      'line 1 is of catalog number "99001", line 2 of "00000", expected the same on both',
    ]);
  });
});
