import { describe, expect, it } from 'vitest';
import { REMARKS, type RemarkGrounds, remarkBitsOf } from '../../src/probability/remarks.js';

const FINE: RemarkGrounds = {
  relativeSpeedMPerS: 12_000,
  missDistanceM: 400,
  hardBodyRadiusM: 10,
  hasProbability: true,
  isStraight: true,
  peakSigmaScale: 1.7,
  elementAgeDays: [0.4, 2],
  maxAgeDays: 30,
  hasDefaultSigma: [false, false],
  isBeyondSigmaTable: [false, false],
  hasDefaultRadius: [false, false],
};

function remarksOf(grounds: RemarkGrounds): string[] {
  const bits = remarkBitsOf(grounds);
  return Object.keys(REMARKS).filter((_, i) => (bits & (1 << i)) !== 0);
}

describe('remarkBitsOf', () => {
  it('has nothing to say about a row in order', () => {
    expect(remarksOf(FINE)).toEqual([]);
    expect(remarksOf({ ...FINE, isStraight: undefined, peakSigmaScale: 1, elementAgeDays: [30, 0] })).toEqual(
      [],
    );
  });

  it.each<[Partial<RemarkGrounds>, string]>([
    [{ relativeSpeedMPerS: 0, hasProbability: false }, 'no-relative-motion'],
    [{ hasProbability: false, peakSigmaScale: undefined }, 'singular-covariance'],
    [{ isStraight: false }, 'not-straight'],
    [{ missDistanceM: 9.9 }, 'miss-within-radius'],
    [{ peakSigmaScale: 0.99 }, 'diluted'],
    [{ elementAgeDays: [1, 30.1] }, 'old-elements'],
    [{ elementAgeDays: [-0.1, 2] }, 'epoch-after-tca'],
    [{ hasDefaultSigma: [false, true] }, 'sigma-default'],
    [{ isBeyondSigmaTable: [true, false] }, 'sigma-extrapolated'],
    [{ hasDefaultRadius: [true, true] }, 'radius-default'],
  ])('%o: %s', (change, code) => {
    expect(remarksOf({ ...FINE, ...change })).toEqual([code]);
  });

  it('lists them in the order of the explanations', () => {
    const all = remarksOf({
      ...FINE,
      relativeSpeedMPerS: 0,
      hasProbability: false,
      isStraight: false,
      missDistanceM: 1,
      peakSigmaScale: 0,
      elementAgeDays: [-31, 40],
      hasDefaultSigma: [true, true],
      isBeyondSigmaTable: [true, true],
      hasDefaultRadius: [true, true],
    });
    expect(all).toEqual(Object.keys(REMARKS).filter((code) => code !== 'singular-covariance'));
  });

  it('has codes without blanks, so that a cell can hold several', () => {
    for (const code of Object.keys(REMARKS)) expect(code).toMatch(/^[a-z]+(-[a-z]+)*$/);
  });
});
