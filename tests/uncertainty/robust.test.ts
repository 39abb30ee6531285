import { describe, expect, test } from 'vitest';
import { AGE_KNOTS_DAYS, knotWindow } from '../../src/uncertainty/calibrate-age-knots.js';
import {
  differenceSigmaM,
  fitGrowthLaw,
  type GrowthPoint,
  setSigmaM,
} from '../../src/uncertainty/calibrate-growth-law.js';
import { addToHistogram, emptyHistogram, histogramSpread } from '../../src/uncertainty/robust-histogram.js';
import { medianOf, robustSpread, smallSampleFactor } from '../../src/uncertainty/robust-spread.js';
import { seededRandom } from '../synthetic/random.js';

function normals(count: number, mean: number, sigma: number, seed: number): Float64Array {
  const random = seededRandom(seed);
  return Float64Array.from({ length: count }, () => random.normal(mean, sigma));
}

describe('robust spread', () => {
  test('median and scaled MAD of a worked example', () => {
    // Deviations from the median 3: 2 1 0 1 997, in order 0 1 1 2 997.
    expect(robustSpread(Float64Array.of(1000, 1, 3, 2, 4))).toEqual({ median: 3, sigma: 1.482602218505602 });
    expect(medianOf(Float64Array.of(4, 1, 3, 2))).toBe(2.5);
  });

  test('of a Gaussian, the standard deviation, within the error of a MAD (1.166 sigma / sqrt n)', () => {
    // Asymptotic variance of the scaled MAD: 1.361 sigma^2 / n (Rousseeuw and Croux 1993, efficiency 36.74 %).
    const { median, sigma } = robustSpread(normals(20_000, 50, 300, 1));
    expect(Math.abs(sigma - 300)).toBeLessThan((4 * 1.166 * 300) / Math.sqrt(20_000));
    expect(Math.abs(median - 50)).toBeLessThan((4 * 1.2533 * 300) / Math.sqrt(20_000));
  });

  test('a tenth of wild values moves it by little', () => {
    const values = normals(10_000, 0, 100, 2);
    for (let i = 0; i < 1000; i++) values[i] = 1e6;
    const { median, sigma } = robustSpread(values);
    expect(sigma).toBeLessThan(125);
    expect(Math.abs(median)).toBeLessThan(20);
  });

  test('leaves its input alone and refuses an empty one', () => {
    const values = Float64Array.of(3, 1, 2);
    robustSpread(values);
    expect([...values]).toEqual([3, 1, 2]);
    expect(() => robustSpread(new Float64Array(0))).toThrow(RangeError);
    expect(() => medianOf(new Float64Array(0))).toThrow(RangeError);
  });

  test.each([10, 20, 40])(
    'small-sample factor makes the scaled MAD of %i values right on average',
    (count) => {
      const trials = 4000;
      let sum = 0;
      for (let trial = 0; trial < trials; trial++)
        sum += robustSpread(normals(count, 0, 1, 1000 + trial)).sigma;
      expect(Math.abs((sum / trials) * smallSampleFactor(count) - 1)).toBeLessThan(0.025);
      expect(Math.abs(sum / trials - 1)).toBeGreaterThan(0.4 / count);
    },
  );

  test('one value carries no spread', () => {
    expect(() => smallSampleFactor(1)).toThrow(RangeError);
  });
});

describe('robust histogram', () => {
  test.each([
    [0, 100],
    [-500, 100],
    [30, 2000],
    [0, 0.05],
  ])('agrees with the exact median and MAD for mean %d, sigma %d', (mean, sigma) => {
    const values = normals(30_000, mean, sigma, 3);
    const histogram = emptyHistogram();
    for (const value of values) addToHistogram(histogram, value, 1);
    const exact = robustSpread(values);
    const spread = histogramSpread(histogram)!;
    const tolerance = 0.01 * Math.max(Math.abs(mean), sigma);
    expect(Math.abs(spread.median - exact.median)).toBeLessThan(tolerance);
    expect(Math.abs(spread.sigma - exact.sigma)).toBeLessThan(2 * tolerance);
  });

  test('weights decide, not counts', () => {
    const histogram = emptyHistogram();
    for (let i = 0; i < 1000; i++) addToHistogram(histogram, 1e5, 1 / 1000);
    for (const value of [1, 2, 3, 4]) addToHistogram(histogram, value, 1);
    expect(histogramSpread(histogram)!.median).toBeCloseTo(3, 1);
  });

  test('holds nothing, holds zeros, holds the largest', () => {
    const histogram = emptyHistogram();
    expect(histogramSpread(histogram)).toBeUndefined();
    addToHistogram(histogram, 0, 1);
    expect(histogramSpread(histogram)).toEqual({ median: 0, sigma: 0 });
    const large = emptyHistogram();
    addToHistogram(large, -1e12, 1);
    expect(histogramSpread(large)!.median).toBeLessThan(-0.98e9);
    expect(() => addToHistogram(large, Number.NaN, 1)).toThrow(RangeError);
  });
});

describe('growth law', () => {
  const points = (sigmaM: (ageDays: number) => number): GrowthPoint[] =>
    AGE_KNOTS_DAYS.map((ageDays) => ({ ageDays, sigmaM: sigmaM(ageDays), weight: 100 }));

  test('finds the coefficients of an exact law', () => {
    const law = fitGrowthLaw(points((t) => Math.sqrt(200 ** 2 + 900 ** 2 * t ** 2 + 50 ** 2 * t ** 4)));
    expect(law.coefficients[0]).toBeCloseTo(200 ** 2, -1);
    expect(law.coefficients[3] / 900 ** 2).toBeCloseTo(1, 4);
    expect(law.coefficients[7] / 50 ** 2).toBeCloseTo(1, 4);
  });

  test.each([0.6, 1.3, 1.7])(
    'follows a power of the age that is not its own, t^%d, to 6 percent',
    (power) => {
      const law = fitGrowthLaw(points((t) => 400 * t ** power));
      for (const age of AGE_KNOTS_DAYS) {
        expect(Math.abs(differenceSigmaM(law, age) / (400 * age ** power) - 1)).toBeLessThan(0.06);
      }
    },
  );

  test('never shrinks, though the measured values do', () => {
    const random = seededRandom(5);
    for (let trial = 0; trial < 50; trial++) {
      const law = fitGrowthLaw(points((t) => 300 * Math.exp(random.normal(0, 0.5)) + 5 * t));
      expect(Math.min(...law.coefficients)).toBeGreaterThanOrEqual(0);
      let before = 0;
      for (let age = 0; age <= 40; age += 0.25) {
        expect(setSigmaM(law, age)).toBeGreaterThanOrEqual(before);
        before = setSigmaM(law, age);
      }
    }
    const falling = fitGrowthLaw(points((t) => 1000 / (1 + t)));
    expect(falling.coefficients.slice(1).every((value) => value < 1)).toBe(true);
  });

  test('noisy points: neither above nor below them on the whole', () => {
    // The score equation of a gamma regression whose mean is linear in its coefficients: the weighted mean of
    // measured over fitted variance is 1 (McCullagh and Nelder, ch. 8).
    const random = seededRandom(6);
    for (let trial = 0; trial < 50; trial++) {
      const noisy = points((t) => Math.hypot(100, 500 * t) * Math.exp(random.normal(0, 0.3)));
      const law = fitGrowthLaw(noisy);
      const ratios = noisy.map(({ ageDays, sigmaM }) => (sigmaM / differenceSigmaM(law, ageDays)) ** 2);
      expect(ratios.reduce((sum, ratio) => sum + ratio, 0) / ratios.length).toBeCloseTo(1, 4);
    }
  });

  test('the newer set takes half of the constant with it', () => {
    const law = fitGrowthLaw(points((t) => Math.sqrt(2 * 150 ** 2 + 800 ** 2 * t ** 2)));
    expect(setSigmaM(law, 0)).toBeCloseTo(150, 2);
    expect(setSigmaM(law, 7)).toBeCloseTo(Math.hypot(150, 5600), 1);
    expect(differenceSigmaM(law, 7)).toBeCloseTo(Math.sqrt(2 * 150 ** 2 + 5600 ** 2), 1);
  });

  test('weights decide between points that contradict each other', () => {
    const law = fitGrowthLaw([
      { ageDays: 1, sigmaM: 100, weight: 1000 },
      { ageDays: 1, sigmaM: 200, weight: 1 },
    ]);
    expect(differenceSigmaM(law, 1)).toBeLessThan(101);
  });

  test('refuses points it cannot use', () => {
    expect(() => fitGrowthLaw([])).toThrow(RangeError);
    expect(() => fitGrowthLaw([{ ageDays: 0, sigmaM: 1, weight: 1 }])).toThrow('age 0 d');
    expect(() => fitGrowthLaw([{ ageDays: 1, sigmaM: Number.NaN, weight: 1 }])).toThrow('sigma NaN m');
    expect(fitGrowthLaw([{ ageDays: 1, sigmaM: 0, weight: 1 }]).coefficients.every(Number.isFinite)).toBe(
      true,
    );
  });
});

describe('age knots', () => {
  test('windows hold their knot, stay within a fifth of it and do not overlap', () => {
    AGE_KNOTS_DAYS.forEach((age, knot) => {
      const { fromDays, toDays } = knotWindow(knot);
      expect(fromDays).toBeGreaterThanOrEqual(age * 0.8);
      expect(fromDays).toBeLessThan(age);
      expect(toDays).toBeLessThanOrEqual(age * 1.2);
      expect(toDays).toBeGreaterThan(age);
      if (knot > 0) expect(fromDays).toBeGreaterThanOrEqual(knotWindow(knot - 1).toDays);
    });
    expect(() => knotWindow(AGE_KNOTS_DAYS.length)).toThrow(RangeError);
  });
});
