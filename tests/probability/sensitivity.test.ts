import { describe, expect, it } from 'vitest';
import { sensitivityOf } from '../../src/probability/sensitivity.js';

describe('sensitivityOf', () => {
  it('follows the density of a small disc', () => {
    const plane = {
      sigmaXM: 200,
      sigmaYM: 100,
      missXM: 300,
      missYM: 100,
      mahalanobisDistance: Math.hypot(1.5, 1),
    };
    const found = sensitivityOf(plane, 0.01);
    const density = (factor: number) =>
      (0.5 * 0.01 ** 2 * Math.exp((-0.5 * 3.25) / factor ** 2)) / (200 * 100 * factor ** 2);
    expect(found.probabilityAtHalf / density(0.5)).toBeCloseTo(1, 7);
    expect(found.probabilityAtOnce / density(1)).toBeCloseTo(1, 7);
    expect(found.probabilityAtTwice / density(2)).toBeCloseTo(1, 7);
    expect(found.peakScale).toBeCloseTo(Math.sqrt(3.25 / 2), 4);
    expect(found.peakProbability / density(found.peakScale)).toBeCloseTo(1, 7);
  });

  it('peaks for vanishing sigmas where the miss is inside the radius', () => {
    const plane = {
      sigmaXM: 20,
      sigmaYM: 10,
      missXM: 3,
      missYM: 1,
      mahalanobisDistance: Math.hypot(0.15, 0.1),
    };
    const found = sensitivityOf(plane, 12);
    expect(found).toMatchObject({ peakScale: 0, peakProbability: 1 });
    expect(found.probabilityAtHalf).toBeGreaterThan(found.probabilityAtOnce);
  });
});
