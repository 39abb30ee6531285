import { expect, it } from 'vitest';
import { parseCatalogNumber } from '../../src/elements/catalog-number.js';

it.each([
  ['5', '5'],
  ['00005', '5'],
  ['00000', '0'],
  ['99999', '99999'],
  ['A0000', '100000'],
  ['H9999', '179999'],
  ['J0000', '180000'],
  ['N1234', '221234'],
  ['P0000', '230000'],
  ['Z9999', '339999'],
  ['123456789', '123456789'],
])('%s is object %s', (text, designator) => {
  expect(parseCatalogNumber(text)).toBe(designator);
});

it.each(['', ' 5', 'I0000', 'O0000', 'a0000', 'A000', 'A00000', 'AB000', '1234567890', '-5', '1e5', '5.0'])(
  '"%s" is none',
  (text) => {
    expect(parseCatalogNumber(text)).toBeUndefined();
  },
);
