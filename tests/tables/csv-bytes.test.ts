import { describe, expect, test } from 'vitest';
import { CAUTION } from '../../src/caution.js';
import {
  type CsvBytes,
  putBytes,
  putExponent,
  putFixed,
  putOneOfFew,
  putText,
  putUtc,
  putWhole,
} from '../../src/tables/csv-bytes.js';
import { exponentCell, fixedCell, textCell, utcCell } from '../../src/tables/csv-text.js';
import { seededRandom } from '../synthetic/random.js';

const START_MS = Date.UTC(2026, 11, 1);
const out: CsvBytes = { bytes: new Uint8Array(64), length: 0 };

/** What is put, read back as text. */
function textOf(put: (out: CsvBytes) => void): string {
  out.length = 0;
  put(out);
  return Buffer.from(out.bytes.buffer, 0, out.length).toString();
}

/** Not by expect for each: a hundred thousand calls of it take seconds. */
function isSame<T>(given: T, put: (out: CsvBytes) => void, wanted: string): void {
  const text = textOf(put);
  if (text !== wanted) expect.unreachable(`${JSON.stringify(given)} became ${text} instead of ${wanted}`);
}

const ODD_NUMBERS = [
  undefined,
  Number.NaN,
  Number.POSITIVE_INFINITY,
  Number.NEGATIVE_INFINITY,
  0,
  -0,
  5e-324,
  2.2250738585072014e-308,
  Number.MAX_VALUE,
  -Number.MAX_VALUE,
  2 ** 53,
  2 ** 53 - 1,
  1e21,
  -1e-7,
  -12.5,
];

describe('cells as bytes are those as text', () => {
  test('with decimals', () => {
    const random = seededRandom(51);
    for (let i = 0; i < 30_000; i++) {
      const drawn = (random.uniform() - 0.5) * 10 ** (random.uniform() * 20 - 5);
      for (const decimals of [1, 3, 4, 6, 9] as const) {
        const value = i < ODD_NUMBERS.length ? ODD_NUMBERS[i] : drawn;
        isSame(value, (bytes) => putFixed(bytes, value, decimals), fixedCell(value, decimals));
        // A half as the last digit, as near to it as a double comes.
        const half = (Math.trunc(drawn) + 0.5) / 10 ** decimals;
        isSame(half, (bytes) => putFixed(bytes, half, decimals), fixedCell(half, decimals));
      }
    }
  });

  test('with an exponent', () => {
    const random = seededRandom(52);
    for (const value of ODD_NUMBERS) isSame(value, (bytes) => putExponent(bytes, value), exponentCell(value));
    for (let i = 0; i < 80_000; i++) {
      const value = 10 ** random.between(-320, 308);
      isSame(value, (bytes) => putExponent(bytes, value), exponentCell(value));
      const usual = 10 ** random.between(-20, 0);
      isSame(usual, (bytes) => putExponent(bytes, usual), exponentCell(usual));
    }
  });

  test('with an exponent where the digits are about to change', () => {
    const random = seededRandom(53);
    const bits = new BigInt64Array(1);
    const float = new Float64Array(bits.buffer);
    for (let exponent = -323; exponent <= 308; exponent++) {
      for (let i = 0; i < 20; i++) {
        // A power of ten, and six digits followed by a half: the doubles next to them on either side.
        const digits = i < 2 ? '1' : `${1 + random.integer(9)}.${10_000 + random.integer(90_000)}5`;
        float[0] = Number(`${digits}e${exponent}`);
        bits[0] -= 3n;
        for (let step = 0; step < 7; step++, bits[0]++) {
          const value = float[0];
          isSame(value, (bytes) => putExponent(bytes, value), exponentCell(value));
        }
      }
    }
  });

  test('of times', () => {
    const random = seededRandom(54);
    isSame(undefined, (bytes) => putUtc(bytes, undefined), '');
    isSame(Number.NaN, (bytes) => putUtc(bytes, Number.NaN), '');
    for (let i = 0; i < 20_000; i++) {
      // Now within one day, now anywhere.
      const ms = i % 3 === 0 ? START_MS + random.between(0, 86_400_000) : random.between(-4e11, 4e12);
      isSame(ms, (bytes) => putUtc(bytes, ms), utcCell(ms));
    }
    const midnight = START_MS - 0.5;
    isSame(midnight, (bytes) => putUtc(bytes, midnight), '2026-12-01T00:00:00.000Z');
  });

  test('of text, whatever it is made of', () => {
    const random = seededRandom(55);
    const letters = [
      'A',
      'z',
      '0',
      '9',
      ' ',
      '!',
      '#',
      '+',
      '-',
      '.',
      '/',
      '~',
      '(',
      '=',
      '@',
      "'",
      '"',
      ',',
    ];
    letters.push('\t', '\r', '\n', '\u007F', 'é', '鵲', '🛰️', '\uD800');
    for (let i = 0; i < 30_000; i++) {
      const length = random.integer(12);
      const from = i % 2 === 0 ? letters.length : 12;
      const text = Array.from({ length }, () => letters[random.integer(from)]).join('');
      // A half of a surrogate pair becomes U+FFFD, as in all UTF-8.
      isSame(text, (bytes) => putText(bytes, text), Buffer.from(textCell(text)).toString());
    }
  });

  test('of text out of few', () => {
    const few = ['', 'FOSTER-1992', '=1', 'ONE, "TWO"', '鵲橋'];
    // Twice: the second time they are at hand.
    for (const text of [...few, ...few]) isSame(text, (bytes) => putOneOfFew(bytes, text), textCell(text));
  });

  test('of whole numbers', () => {
    for (let value = 0; value < 2 ** 53; value = value < 1200 ? value + 1 : Math.floor(value * 1.37)) {
      isSame(value, (bytes) => putWhole(bytes, value), String(value));
    }
    isSame(1e9, (bytes) => putWhole(bytes, 1e9), '1000000000');
    isSame(2 ** 53 - 1, (bytes) => putWhole(bytes, 2 ** 53 - 1), '9007199254740991');
  });
});

test('bytes grow as text comes, and keep what they hold', () => {
  const grown: CsvBytes = { bytes: new Uint8Array(0), length: 0 };
  const caution = Buffer.from(CAUTION);
  let wanted = '';
  for (let i = 0; i < 300; i++) {
    putWhole(grown, i);
    putText(grown, 'LARKSPUR');
    putText(grown, '鵲橋');
    putBytes(grown, caution);
    wanted += `${i}LARKSPUR鵲橋${CAUTION}`;
  }
  expect(Buffer.from(grown.bytes.buffer, 0, grown.length).toString()).toBe(wanted);
});
