import { beforeAll, describe, expect, it } from 'vitest';
import { sgp4RecordOf } from '../../src/elements/sgp4-record.js';
import { type RadiusBand, radiusBand, sieve } from '../../src/encounters/sieve.js';
import { loadSgp4 } from '../../src/ephemeris/sgp4-module.js';
import { sgp4RecordsOf } from '../../src/ephemeris/sgp4-records.js';
import { sgp4StateAt } from '../ephemeris/sgp4-state.js';
import { syntheticCatalog } from '../synthetic/catalog.js';
import { seededRandom } from '../synthetic/random.js';

const START_MS = Date.UTC(2026, 11, 1);
const DAY_MS = 86_400_000;

beforeAll(loadSgp4);

describe('radiusBand', () => {
  it('holds every radius that SGP4 gives in the window', () => {
    const endMs = START_MS + 7 * DAY_MS;
    const state = new Float64Array(6);
    let banded = 0;
    for (const set of syntheticCatalog({ seed: 31, count: 160, epochMs: START_MS })) {
      const record = sgp4RecordOf(set);
      const band = radiusBand({ records: sgp4RecordsOf([set]), place: 0 }, set.epochMs, START_MS, endMs);
      if (band === undefined) continue;
      banded++;
      for (let timeMs = START_MS; timeMs <= endMs; timeMs += 2_717_000) {
        expect(sgp4StateAt(record, set.epochMs, timeMs, state)).toBe(true);
        const radiusKm = Math.hypot(state[0], state[1], state[2]);
        expect(radiusKm).toBeGreaterThan(band.lowKm);
        expect(radiusKm).toBeLessThan(band.highKm);
      }
    }
    expect(banded).toBeGreaterThan(140);
  });
});

describe('sieve', () => {
  it('passes exactly the objects whose band comes within reach of a primary', () => {
    const random = seededRandom(32);
    const band = (): RadiusBand => {
      const lowKm = random.between(6400, 9000);
      return { lowKm, highKm: lowKm + random.between(1, 300) };
    };
    const bands = Array.from({ length: 500 }, band);
    const primaries = Array.from({ length: 8 }, band);
    const passes = sieve(bands, primaries, 25);
    const expected = bands.map(({ lowKm, highKm }) =>
      primaries.some((p) => lowKm <= p.highKm + 25 && highKm >= p.lowKm - 25) ? 1 : 0,
    );
    expect([...passes]).toEqual(expected);
    expect(expected.includes(0)).toBe(true);
  });

  it('never drops an object without a band, nor any object where a primary has none', () => {
    const far = { lowKm: 42_000, highKm: 42_100 };
    const near = { lowKm: 6800, highKm: 6900 };
    expect([...sieve([far, undefined], [near], 5)]).toEqual([0, 1]);
    expect([...sieve([far], [near, undefined], 5)]).toEqual([1]);
    expect([...sieve([], [near], 5)]).toEqual([]);
  });
});
