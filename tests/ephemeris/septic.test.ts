import { describe, expect, it } from 'vitest';
import { TWO_BODY_REACH } from '../../src/ephemeris/node-spacing.js';
import { evaluateSegment, fitSegment, SEGMENT_SIZE } from '../../src/ephemeris/septic.js';
import { seededRandom } from '../synthetic/random.js';
import { MU, move, stateOnOrbit } from './motion-under-gravity.js';

/** Largest distance (km) and difference in speed (km/s) between a segment and a numerically integrated path. */
function worstOfSegment(start: readonly number[], lengthS: number): { km: number; kmPerS: number } {
  const end = move(start, lengthS);
  const coefficients = new Float64Array(SEGMENT_SIZE);
  fitSegment(Float64Array.of(...start, ...end), 0, 6, lengthS, coefficients, 0);
  const out = new Float64Array(6);
  let km = 0;
  let kmPerS = 0;
  let truth = [...start];
  for (let part = 1; part < 16; part++) {
    truth = move(truth, lengthS / 16);
    evaluateSegment(coefficients, 0, part / 16, 1 / lengthS, out, 0);
    km = Math.max(km, Math.hypot(out[0] - truth[0], out[1] - truth[1], out[2] - truth[2]));
    kmPerS = Math.max(kmPerS, Math.hypot(out[3] - truth[3], out[4] - truth[4], out[5] - truth[5]));
  }
  return { km, kmPerS };
}

describe('a segment of degree seven', () => {
  it('meets a path under gravity with J2 as closely as the spacing of nodes counts on', () => {
    const random = seededRandom(2);
    for (const [eccentricity, angle] of TWO_BODY_REACH.slice(0, 10)) {
      for (const perigeeKm of [6700, 7500, 9000]) {
        const rate = Math.sqrt((MU * (1 + eccentricity)) / perigeeKm ** 3);
        const lengthS = angle / rate;
        // Somewhere on the orbit; near perigee, half a segment before it, it is worst.
        const anomaly = random.between(-0.6, 0.2) * angle;
        const { km, kmPerS } = worstOfSegment(
          stateOnOrbit(random, perigeeKm, eccentricity, anomaly),
          lengthS,
        );
        // J2 adds its own faster waves to the two-body error of 1e-5 of the perigee distance.
        expect(km).toBeLessThan(3e-5 * perigeeKm);
        // Bound 1 of the search: 13 E / h at the most.
        expect(kmPerS).toBeLessThan((13 * km) / lengthS);
      }
    }
  });

  it('errs with the eighth power of its length', () => {
    const start = stateOnOrbit(seededRandom(3), 7000, 0.01, 0.3);
    const long = worstOfSegment(start, 2000).km;
    const short = worstOfSegment(start, 1000).km;
    expect(Math.log2(long / short)).toBeGreaterThan(7.5);
    expect(Math.log2(long / short)).toBeLessThan(8.7);
  });

  it('passes through both nodes with their velocities', () => {
    const start = stateOnOrbit(seededRandom(4), 7000, 0.2, 1);
    const end = move(start, 600);
    const coefficients = new Float64Array(2 + SEGMENT_SIZE);
    fitSegment(Float64Array.of(7, 7, 7, ...start, ...end), 3, 9, 600, coefficients, 2);
    const out = new Float64Array(6);
    evaluateSegment(coefficients, 2, 0, 1 / 600, out, 0);
    out.forEach((value, k) => {
      expect(value).toBeCloseTo(start[k], 9);
    });
    evaluateSegment(coefficients, 2, 1, 1 / 600, out, 0);
    out.forEach((value, k) => {
      expect(value).toBeCloseTo(end[k], 8);
    });
  });
});
