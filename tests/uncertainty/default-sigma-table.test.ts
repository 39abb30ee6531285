import { describe, expect, it } from 'vitest';
import { defaultSigmaTable, EPOCH_SIGMAS } from '../../src/uncertainty/default-sigma-table.js';
import { covers, sigmaAt, sigmaCurveFor } from '../../src/uncertainty/sigma-table.js';

const table = defaultSigmaTable();
const curveOf = (perigeeHeightKm: number, eccentricity: number, inclinationDeg: number) =>
  sigmaCurveFor(undefined, table, { designator: '1', perigeeHeightKm, eccentricity, inclinationDeg });

describe('the built-in sigma table', () => {
  it('covers every orbit: near-circular ones by one class of their own, eccentric ones by one other', () => {
    for (const perigeeHeightKm of [
      -100, 0, 150, 449.9, 450, 600, 799.9, 800, 1999.9, 2000, 24_999, 20_200, 25_000, 35_786, 1e6,
    ]) {
      for (const eccentricity of [0, 0.0999, 0.1, 0.74, 0.9999]) {
        for (const inclinationDeg of [0, 29.99, 30, 53, 60, 98, 180]) {
          const key = { perigeeHeightKm, eccentricity, inclinationDeg };
          const covering = table.classes.filter((each) => covers(each, key));
          expect(
            covering.filter((each) => each.eccentricityMax > 1),
            JSON.stringify(key),
          ).toHaveLength(1);
          expect(
            covering.filter((each) => each.eccentricityMax === 0.1),
            JSON.stringify(key),
          ).toHaveLength(eccentricity < 0.1 ? 1 : 0);
          const label = eccentricity < 0.1 ? 'near-circular' : 'eccentric';
          expect(curveOf(perigeeHeightKm, eccentricity, inclinationDeg).label).toContain(label);
        }
      }
    }
  });

  // Flohrer, Krag, Klinkrad, "Assessment and Categorization of TLE Orbit Errors for the US SSN Catalogue",
  // AMOS 2008: at-epoch sigmas for eccentricities below 0.1. From memory, not checked against the paper.
  it.each([
    [400, 20, [67, 118, 75]],
    [790, 45, [107, 308, 169]],
    [550, 97, [115, 517, 137]],
    [1200, 10, [191, 256, 203]],
    [20_200, 55, [71, 228, 95]],
    [850, 98, [91, 428, 114]],
    [35_786, 0.1, [357, 432, 83]],
  ])(
    'has the remembered figures at epoch for perigee %d km, inclination %d deg',
    (perigee, inclination, sigmas) => {
      const found = sigmaAt(curveOf(perigee, 0.001, inclination), 0);
      for (let axis = 0; axis < 3; axis++) expect(found[axis]).toBeCloseTo(sigmas[axis], 9);
      expect(curveOf(perigee, 0.001, inclination).isDefault).toBe(true);
    },
  );

  it('grows along the orbit by 1 to 3 km a day in low orbit, fastest where drag is strong (common practice)', () => {
    const perDay = [300, 500, 700, 1500].map((perigee) => {
      const curve = curveOf(perigee, 0.001, 97);
      return Math.round((sigmaAt(curve, 30)[1] - sigmaAt(curve, 14)[1]) / 16);
    });
    for (const growth of perDay) {
      expect(growth).toBeGreaterThanOrEqual(1000);
      expect(growth).toBeLessThanOrEqual(3000);
    }
    expect(perDay[0]).toBeGreaterThan(perDay[1]);
    expect(perDay[1]).toBeGreaterThan(perDay[2]);
  });

  it('never shrinks with age and holds more uncertainty for eccentric orbits', () => {
    for (const { curve } of table.classes) {
      for (let i = 3; i < curve.sigmaRtnM.length; i++) {
        expect(curve.sigmaRtnM[i]).toBeGreaterThanOrEqual(curve.sigmaRtnM[i - 3]);
      }
    }
    for (const age of [0, 1, 7]) {
      expect(sigmaAt(curveOf(300, 0.7, 28), age)[1]).toBeGreaterThan(
        sigmaAt(curveOf(300, 0.001, 28), age)[1],
      );
    }
  });

  it('names the origin of every figure', () => {
    for (const { origin } of EPOCH_SIGMAS)
      expect(origin).toMatch(/from memory|common practice|own assumption/);
  });
});
