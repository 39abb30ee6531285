import { sgp4 } from 'satellite.js';
import { describe, expect, it } from 'vitest';
import { sgp4RecordOf } from '../../src/elements/sgp4-record.js';
import { createMeanOrbits, layMeanOrbit, stateOnMeanOrbit } from '../../src/ephemeris/mean-orbits.js';
import {
  AXIS,
  E_ACROSS_NODE,
  E_ALONG_NODE,
  LATITUDE,
  laySecularTerms,
  NODE,
  SECULAR_SIZE,
  secularElementsAt,
  TERMS_SIZE,
} from '../../src/ephemeris/secular-elements.js';
import { loadSgp4 } from '../../src/ephemeris/sgp4-module.js';
import { sgp4RecordsOf } from '../../src/ephemeris/sgp4-records.js';
import { syntheticCatalog } from '../synthetic/catalog.js';
import { sgp4StateAt } from './sgp4-state.js';

await loadSgp4();

const START_MS = Date.UTC(2026, 11, 1);
const HALF_SPAN_S = 7200;

const objects = [
  ...syntheticCatalog({ seed: 51, count: 300, epochMs: START_MS }),
  ...syntheticCatalog({
    seed: 52,
    count: 100,
    epochMs: START_MS,
    mix: { low: 0, eccentric: 0, medium: 0, geosynchronous: 0, decaying: 1, train: 0 },
  }),
].flatMap((set) => {
  const record = sgp4RecordOf(set);
  if (record.method === 'd') return [];
  const terms = new Float64Array(TERMS_SIZE);
  laySecularTerms(sgp4RecordsOf([set]), 0, terms, 0);
  return [{ set, record, terms }];
});

describe('secular elements', () => {
  it('are those of satellite.js, with the long periods of J3 added', () => {
    const out = new Float64Array(SECULAR_SIZE);
    const turn = (angle: number) => angle - 2 * Math.PI * Math.round(angle / (2 * Math.PI));
    let compared = 0;
    for (const { record, terms } of objects) {
      for (const minutes of [-2000, 0, 777, 9000]) {
        const mean = sgp4(record, minutes)?.meanElements;
        if (mean === undefined || !secularElementsAt(terms, 0, minutes, out)) continue;
        compared++;
        const perParameter = 1 / (mean.am * (1 - mean.em ** 2));
        const along = mean.em * Math.cos(mean.om);
        expect(out[AXIS]).toBeCloseTo(mean.am, 12);
        expect(out[E_ALONG_NODE]).toBeCloseTo(along, 12);
        expect(out[E_ACROSS_NODE]).toBeCloseTo(mean.em * Math.sin(mean.om) + perParameter * record.aycof, 12);
        expect(turn(out[LATITUDE] - mean.mm - mean.om - perParameter * record.xlcof * along)).toBeCloseTo(
          0,
          9,
        );
        expect(turn(out[NODE] - mean.Om)).toBeCloseTo(0, 9);
      }
    }
    expect(compared).toBeGreaterThan(1000);
  });
});

describe('mean orbits', () => {
  it('lie within their tolerance of SGP4, radii included, over a span of hours', () => {
    const orbits = createMeanOrbits(1);
    const state = new Float64Array(6);
    const truth = new Float64Array(6);
    let laid = 0;
    let largest = 0;
    for (const [index, { set, record, terms }] of objects.entries()) {
      for (const days of [0.1, 3, 6.9]) {
        const middleMs = START_MS + days * 86_400_000;
        if (!layMeanOrbit(orbits, 0, terms, 0, set.epochMs, middleMs, HALF_SPAN_S)) continue;
        if (!(orbits.lowKm[0] > 6500)) continue;
        laid++;
        for (let k = 0; k < 9; k++) {
          const timeS = HALF_SPAN_S * (((0.618 * index + k / 4.5) % 2) - 1);
          expect(sgp4StateAt(record, set.epochMs, middleMs + timeS * 1000, truth)).toBe(true);
          stateOnMeanOrbit(orbits, 0, timeS, state, 0);
          const off = Math.hypot(truth[0] - state[0], truth[1] - state[1], truth[2] - state[2]);
          largest = Math.max(largest, off / orbits.toleranceKm[0]);
          const radiusKm = Math.hypot(truth[0], truth[1], truth[2]);
          expect(radiusKm).toBeGreaterThan(orbits.lowKm[0]);
          expect(radiusKm).toBeLessThan(orbits.highKm[0]);
        }
      }
    }
    expect(laid).toBeGreaterThan(600);
    expect(largest).toBeLessThan(1);
    // A bound far above what it bounds would be of no use.
    expect(largest).toBeGreaterThan(0.3);
  });

  it('have the velocity of their path', () => {
    const orbits = createMeanOrbits(1);
    const [before, now, after] = [0, 1, 2].map(() => new Float64Array(6));
    for (const { set, terms } of objects) {
      if (!layMeanOrbit(orbits, 0, terms, 0, set.epochMs, START_MS, HALF_SPAN_S)) continue;
      stateOnMeanOrbit(orbits, 0, 99, before, 0);
      stateOnMeanOrbit(orbits, 0, 100, now, 0);
      stateOnMeanOrbit(orbits, 0, 101, after, 0);
      const off = Math.hypot(...[0, 1, 2].map((k) => (after[k] - before[k]) / 2 - now[3 + k]));
      // The turn of the eccentricity vector is left out (`unevenKmPerS`), a difference over 2 s errs by 1e-6.
      expect(off).toBeLessThan(
        2e-6 + 2.5 * orbits.axisKm[0] * Math.hypot(orbits.eAlongRate[0], orbits.eAcrossRate[0]),
      );
    }
  });
});
