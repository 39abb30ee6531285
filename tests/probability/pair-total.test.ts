import { describe, expect, it } from 'vitest';
import { pairTotal } from '../../src/probability/pair-total.js';

describe('pairTotal', () => {
  it('is the complement of no collision at all', () => {
    expect(pairTotal([0.5, 0.5])).toBeCloseTo(0.75, 15);
    expect(pairTotal([0.1, 0.2, 0.3])).toBeCloseTo(1 - 0.9 * 0.8 * 0.7, 15);
    expect(pairTotal([0.25])).toBe(0.25);
    expect(pairTotal([1, 0.2])).toBe(1);
    expect(pairTotal([0, 0])).toBe(0);
  });

  it('keeps its digits where 1 - p would lose them', () => {
    expect(pairTotal([1e-20, 2e-20])).toBeCloseTo(3e-20, 34);
    expect((pairTotal([1e-9, 1e-9]) ?? 0) / (2e-9 - 1e-18)).toBeCloseTo(1, 14);
    expect(pairTotal([1e-300])).toBe(1e-300);
  });

  it('takes encounters without a figure as nothing, and has none where all lack it', () => {
    expect(pairTotal([undefined, 0.25])).toBe(0.25);
    expect(pairTotal([undefined])).toBeUndefined();
    expect(pairTotal([])).toBeUndefined();
  });

  it.each([-0.1, 1.1, Number.NaN])('refuses %d', (wrong) => {
    expect(() => pairTotal([0.1, wrong])).toThrow(
      new RangeError(`a probability must be from 0 to 1, got ${wrong}`),
    );
  });
});
