import { describe, expect, it } from 'vitest';
import { fosterProbability } from '../../src/probability/foster.js';
import { peakScaleOf } from '../../src/probability/peak-scale.js';
import { logUniform, seeded } from './seeded.js';

const STEP = 1e-4;

describe('peakScaleOf', () => {
  it('is where the logarithm of the probability is level, 1000 random cases', () => {
    const random = seeded(5);
    let largest = 0;
    let found = 0;
    for (let i = 0; i < 1000; i++) {
      const sigmaXM = logUniform(random, 10, 1e4);
      const sigmaYM = sigmaXM * logUniform(random, 0.02, 1);
      const hardBodyRadiusM = logUniform(random, 1, 100);
      const angle = 2 * Math.PI * random();
      const distance = hardBodyRadiusM * (1 + logUniform(random, 1, 1000));
      const missXM = distance * Math.cos(angle);
      const missYM = distance * Math.sin(angle);
      const scale = peakScaleOf(sigmaXM, sigmaYM, missXM, missYM, hardBodyRadiusM);
      if (scale === undefined) continue;
      found++;
      const logAt = (logFactor: number) => {
        const factor = scale * Math.exp(logFactor);
        return Math.log(
          fosterProbability({
            sigmaXM: factor * sigmaXM,
            sigmaYM: factor * sigmaYM,
            missXM,
            missYM,
            hardBodyRadiusM,
          }),
        );
      };
      const slope = (logAt(STEP) - logAt(-STEP)) / (2 * STEP);
      const bend = (logAt(10 * STEP) + logAt(-10 * STEP) - 2 * logAt(0)) / (100 * STEP * STEP);
      expect(bend).toBeLessThan(-1);
      largest = Math.max(largest, Math.abs(slope / bend));
    }
    expect(found).toBeGreaterThan(800);
    expect(largest).toBeLessThan(2e-8);
  });

  it('is the closed form of Alfano (2005) for a vanishing disc, without loss of digits', () => {
    // k = (Mahalanobis distance) / sqrt(2).
    const found = peakScaleOf(400, 150, 900, -500, 1e-9);
    expect(Math.abs((found ?? 0) / (Math.hypot(900 / 400, 500 / 150) * Math.SQRT1_2) - 1)).toBeLessThan(
      1e-14,
    );
  });

  it('leaves large discs to others', () => {
    expect(peakScaleOf(10, 10, 100, 0, 99)).toBeUndefined();
    expect(peakScaleOf(1000, 1, 500, 0, 200)).toBeUndefined();
  });
});
