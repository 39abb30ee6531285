import { describe, expect, it } from 'vitest';
import { fosterProbability } from '../../src/probability/foster.js';
import { maximumProbability } from '../../src/probability/maximum.js';
import { logUniform, seeded } from './seeded.js';

describe('maximumProbability', () => {
  it('is the closed form of Alfano (2005) for a disc much smaller than the sigmas', () => {
    // P = R^2 / (2 k^2 sx sy) exp(-d^2 / 2 k^2) has its peak R^2 / (e d^2 sx sy) at k^2 = d^2 / 2.
    const encounter = { sigmaXM: 400, sigmaYM: 150, missXM: 900, missYM: -500, hardBodyRadiusM: 0.01 };
    const distance = Math.hypot(900 / 400, 500 / 150);
    const found = maximumProbability(encounter);
    expect(found.probability / (0.01 ** 2 / (Math.E * distance ** 2 * 400 * 150))).toBeCloseTo(1, 8);
    expect(found.sigmaScale / (distance * Math.SQRT1_2)).toBeCloseTo(1, 5);
  });

  it('is the largest figure of a fine search over the scale, 150 random cases', () => {
    const random = seeded(3);
    for (let i = 0; i < 150; i++) {
      const sigmaXM = logUniform(random, 1, 1e3);
      const sigmaYM = logUniform(random, 1, 1e3);
      const hardBodyRadiusM = logUniform(random, 1, 1e3);
      const angle = 2 * Math.PI * random();
      const distance = hardBodyRadiusM * (1 + logUniform(random, 1e-3, 100));
      const missXM = distance * Math.cos(angle);
      const missYM = distance * Math.sin(angle);
      const found = maximumProbability({ sigmaXM, sigmaYM, missXM, missYM, hardBodyRadiusM });
      let best = 0;
      let bestScale = 0;
      for (let logScale = -15; logScale < 12; logScale += 0.04) {
        const scale = Math.exp(logScale);
        const here = fosterProbability({
          sigmaXM: scale * sigmaXM,
          sigmaYM: scale * sigmaYM,
          missXM,
          missYM,
          hardBodyRadiusM,
        });
        if (here > best) [best, bestScale] = [here, scale];
      }
      const which = `${sigmaXM}, ${sigmaYM}, ${missXM}, ${missYM}, ${hardBodyRadiusM}`;
      // Steps of 4 % in the scale stay within 1e-3 of the peak itself.
      expect(found.probability, which).toBeGreaterThanOrEqual(best * (1 - 1e-12));
      expect(found.probability, which).toBeLessThan(best * 1.001);
      expect(Math.abs(Math.log(found.sigmaScale / bestScale)), which).toBeLessThan(0.05);
    }
  });

  it('scales with the sigmas', () => {
    const encounter = { sigmaXM: 80, sigmaYM: 20, missXM: 100, missYM: 60, hardBodyRadiusM: 15 };
    const found = maximumProbability(encounter);
    const tripled = maximumProbability({ ...encounter, sigmaXM: 240, sigmaYM: 60 });
    expect(tripled.probability).toBeCloseTo(found.probability, 12);
    expect((tripled.sigmaScale * 3) / found.sigmaScale).toBeCloseTo(1, 5);
  });

  it('gives the limits for vanishing sigmas where the miss is inside the radius or on it', () => {
    const encounter = { sigmaXM: 80, sigmaYM: 20, missXM: 3, missYM: 4, hardBodyRadiusM: 6 };
    expect(maximumProbability(encounter)).toEqual({ probability: 1, sigmaScale: 0 });
    expect(maximumProbability({ ...encounter, hardBodyRadiusM: 5 })).toEqual({
      probability: 0.5,
      sigmaScale: 0,
    });
    const outside = maximumProbability({ ...encounter, hardBodyRadiusM: 5 * (1 - 1e-9) });
    expect(outside.probability).toBeGreaterThan(0.4999);
    expect(outside.probability).toBeLessThan(0.5);
    expect(outside.sigmaScale).toBeGreaterThan(0);
  });

  it('is 0 for a radius of 0', () => {
    const encounter = { sigmaXM: 80, sigmaYM: 20, missXM: 80, missYM: 0, hardBodyRadiusM: 0 };
    expect(maximumProbability(encounter)).toEqual({ probability: 0, sigmaScale: Math.SQRT1_2 });
  });
});
