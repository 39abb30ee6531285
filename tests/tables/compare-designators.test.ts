import { expect, test } from 'vitest';
import { compareDesignators } from '../../src/tables/compare-designators.js';

test('orders designators as numbers, others after them', () => {
  expect(['B', '100', '99', 'A', '799999999', '5'].sort(compareDesignators)).toEqual([
    '5',
    '99',
    '100',
    '799999999',
    'A',
    'B',
  ]);
});
