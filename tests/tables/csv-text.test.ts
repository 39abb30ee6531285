import { Writable } from 'node:stream';
import { stringify } from 'csv-stringify/sync';
import { describe, expect, test } from 'vitest';
import {
  type CsvColumn,
  exponentCell,
  exponentText,
  fixedCell,
  textCell,
  utcCell,
  writeCsv,
} from '../../src/tables/csv-text.js';
import { seededRandom } from '../synthetic/random.js';
import { collect, strictCsv } from './strict-csv.js';

const FORMULA_START = /^\s*[=+\-@\t\r\n＝＋－＠]/;

/** The documented way back: one apostrophe off a cell that looks like a formula behind apostrophes. */
function withoutGuard(cell: string): string {
  return /^'+\s*[=+\-@\t\r\n＝＋－＠]/.test(cell) ? cell.slice(1) : cell;
}

const HARMLESS = [
  '',
  'LARKSPUR 1',
  'ONE, TWO',
  'THE "BIG" ONE',
  '"',
  '""',
  ',',
  'TWO\r\nLINES',
  'TWO\nLINES',
  'OLD\rMAC',
  ' BLANKS AROUND ',
  'ЗАРЯ-9',
  '鵲橋 三號',
  'قمر ٣',
  'Größe ½ 🛰️',
  "'QUOTED'",
  'A=B',
  '#1',
  '1-2',
];
const DANGEROUS = [
  '=1+1',
  '+1',
  '-1+2',
  '@SUM(A1)',
  '\tTAB',
  '\rCR',
  '\nLF',
  '  =1',
  '\uFEFF=1',
  '=A,"B"\r\nC',
  "'=1",
  "''-1",
  '-',
  '＝1',
  '＋1',
  '－1',
  '＠1',
];

describe('a cell of text', () => {
  test.each(HARMLESS)('comes back unchanged from a strict parser: %j', (text) => {
    expect(strictCsv(`a,b,c\r\nx,${textCell(text)},y\r\n`)[1]).toEqual(['x', text, 'y']);
  });

  test.each(DANGEROUS)('is no formula, and one apostrophe off gives it back: %j', (text) => {
    const [, cell] = strictCsv(`a,b,c\r\nx,${textCell(text)},y\r\n`)[1];
    expect(cell).not.toMatch(FORMULA_START);
    expect(cell).toBe(`'${text}`);
    expect(withoutGuard(cell)).toBe(text);
  });

  test('is quoted exactly as csv-stringify does it', () => {
    for (const text of HARMLESS) {
      if (text.startsWith(' ')) continue;
      expect(`${textCell(text)},x\n`).toBe(stringify([[text, 'x']]));
    }
  });

  test('comes back whatever characters it is made of', () => {
    const random = seededRandom(41);
    const alphabet = ['a', ' ', ',', '"', "'", '\r', '\n', '\t', '=', '-', '+', '@', 'é', '鵲', '🛰️', '0'];
    for (let i = 0; i < 3000; i++) {
      const length = Math.floor(random.uniform() * 8);
      const text = Array.from(
        { length },
        () => alphabet[Math.floor(random.uniform() * alphabet.length)],
      ).join('');
      const cells = strictCsv(`a,b,c\r\nx,${textCell(text)},y\r\n`)[1];
      expect(cells).toHaveLength(3);
      expect(withoutGuard(cells[1])).toBe(text);
      expect(cells[1]).not.toMatch(FORMULA_START);
    }
  });
});

describe('a cell of numbers', () => {
  test('has the digits asked for and a plain point', () => {
    expect(fixedCell(1234.5678, 3)).toBe('1234.568');
    expect(fixedCell(-0.05, 3)).toBe('-0.050');
    expect(fixedCell(7, 4)).toBe('7.0000');
    expect(fixedCell(0.999_96, 4)).toBe('1.0000');
    expect(fixedCell(4.2e7, 3)).toBe('42000000.000');
    expect(fixedCell(1e15, 3)).toBe('1000000000000000.000');
  });

  test('agrees with toFixed', () => {
    const random = seededRandom(42);
    for (let i = 0; i < 20_000; i++) {
      const value = (random.uniform() - 0.5) * 10 ** (random.uniform() * 12 - 3);
      for (const decimals of [1, 3, 4, 6] as const) {
        const text = fixedCell(value, decimals);
        // Half a last digit, and what a double at that size can hold.
        const tolerance = 0.5 * 10 ** -decimals * (1 + 1e-6) + Math.abs(value) * 1e-15;
        // Not by expect for each: a hundred thousand calls of it take seconds.
        const isRight =
          /^-?\d+\.\d+$/.test(text) &&
          Math.abs(Number(text) - value) <= tolerance &&
          text.length >= value.toFixed(decimals).length - 1;
        if (!isRight) expect.unreachable(`${value} became ${text}`);
      }
    }
  });

  test('has no negative zero', () => {
    expect(fixedCell(-0.0001, 3)).toBe('0.000');
    expect(fixedCell(-0, 3)).toBe('0.000');
    expect(exponentCell(-0)).toBe('0.00000E+00');
  });

  test('is empty where there is no figure', () => {
    for (const value of [undefined, Number.NaN, Number.POSITIVE_INFINITY, Number.NEGATIVE_INFINITY]) {
      expect(fixedCell(value, 3)).toBe('');
      expect(exponentCell(value)).toBe('');
      expect(utcCell(value)).toBe('');
    }
  });

  test('writes probabilities with six significant digits', () => {
    expect(exponentCell(1.234_567_8e-5)).toBe('1.23457E-05');
    expect(exponentCell(1)).toBe('1.00000E+00');
    expect(exponentCell(9.999_999_9e-101)).toBe('1.00000E-100');
    expect(exponentCell(5e-324)).toBe('4.94066E-324');
    expect(exponentText(1.234_567_8e-5, 1)).toBe('1.2E-05');
  });
});

test('a time is that of Date.toISOString, rounded to the nearest millisecond', () => {
  const random = seededRandom(43);
  for (let i = 0; i < 5000; i++) {
    const ms = Date.UTC(1957, 9, 4) + random.uniform() * 150 * 365.25 * 86_400_000;
    expect(utcCell(ms)).toBe(new Date(Math.round(ms)).toISOString());
  }
  expect(utcCell(Date.UTC(2026, 11, 31, 23, 59, 59, 999) + 0.6)).toBe('2027-01-01T00:00:00.000Z');
});

describe('writing a table', () => {
  type Row = { readonly name: string; readonly value: number };
  const columns: readonly CsvColumn<Row>[] = [
    { name: 'number', unit: '', meaning: '', cell: (_row, number) => String(number) },
    { name: 'name', unit: '', meaning: '', cell: (row) => textCell(row.name) },
    { name: 'value', unit: 'm', meaning: '', cell: (row) => fixedCell(row.value, 3) },
  ];

  test('ends every record with CRLF, the header too, and starts without a byte order mark', async () => {
    const text = await collect((output) => writeCsv(output, columns, [{ name: 'A, B', value: -1 }]));
    expect(text).toBe('number,name,value\r\n1,"A, B",-1.000\r\n');
  });

  test('writes the header alone when there are no rows', async () => {
    expect(await collect((output) => writeCsv(output, columns, []))).toBe('number,name,value\r\n');
  });

  test('takes rows only as fast as the stream does', async () => {
    let taken = 0;
    function* rows(): Generator<Row> {
      for (let i = 0; i < 300_000; i++) {
        taken++;
        yield { name: 'LARKSPUR', value: i };
      }
    }
    let written = 0;
    let mostAhead = 0;
    const output = new Writable({
      write(chunk: Buffer, _encoding, done) {
        written += chunk.toString('latin1').split('\r\n').length - 1;
        mostAhead = Math.max(mostAhead, taken - written);
        setImmediate(done);
      },
    });
    expect(await writeCsv(output, columns, rows())).toBe(300_000);
    expect(written).toBe(300_001);
    expect(mostAhead).toBeLessThan(100_000);
  });

  test('hands on what the stream or the rows throw', async () => {
    const full = new Writable({
      write(_chunk, _encoding, done) {
        done(new Error('no space left on device'));
      },
    });
    await expect(writeCsv(full, columns, [{ name: 'A', value: 1 }])).rejects.toThrow('no space left');
    async function* broken(): AsyncGenerator<Row> {
      yield { name: 'A', value: 1 };
      throw new Error('the rows broke off');
    }
    await expect(collect((output) => writeCsv(output, columns, broken()))).rejects.toThrow('broke off');
  });
});
