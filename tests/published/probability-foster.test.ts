import { describe, expect, it } from 'vitest';
import { fosterProbability } from '../../src/probability/foster.js';

// F. K. Chan, Spacecraft Collision Probability, Aerospace Press/AIAA 2008, as tabulated in R. Serra et al.,
// "Fast and Accurate Computation of Orbital Collision Probability for Short-Term Encounters", Journal of
// Guidance, Control, and Dynamics 39(5), 2016: sigma x, sigma y, radius, miss x, miss y, probability.
const PUBLISHED = [
  [50, 25, 5, 10, 0, '9.742e-3'],
  [50, 25, 5, 0, 10, '9.181e-3'],
  [75, 25, 5, 10, 0, '6.571e-3'],
  [75, 25, 5, 0, 10, '6.125e-3'],
  [3000, 1000, 10, 1000, 0, '1.577e-5'],
  [3000, 1000, 10, 0, 1000, '1.011e-5'],
  [3000, 1000, 10, 10000, 0, '6.443e-8'],
  [3000, 1000, 10, 0, 10000, '3.219e-27'],
  [10000, 1000, 10, 10000, 0, '3.033e-6'],
  [10000, 1000, 10, 0, 10000, '9.656e-28'],
  [3000, 1000, 50, 5000, 0, '1.039e-4'],
  [3000, 1000, 50, 0, 5000, '1.564e-9'],
] as const;

describe('the twelve published cases', () => {
  it.each(PUBLISHED)('sigma %d by %d m, radius %d m, miss (%d, %d) m: %s', (x, y, r, dx, dy, printed) => {
    const found = fosterProbability({ sigmaXM: x, sigmaYM: y, missXM: dx, missYM: dy, hardBodyRadiusM: r });
    expect(found.toExponential(3)).toBe(printed);
  });
});

describe('equal sigmas', () => {
  it('gives the non-central chi-square distribution as SciPy has it', () => {
    // scipy.stats.ncx2.cdf(20^2 / 100^2, 2, 100^2 / 100^2)
    const found = fosterProbability({
      sigmaXM: 100,
      sigmaYM: 100,
      missXM: 60,
      missYM: 80,
      hardBodyRadiusM: 20,
    });
    expect(found).toBeCloseTo(0.012070061801, 12);
  });
});
