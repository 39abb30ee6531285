import { beforeAll, expect, it } from 'vitest';
import { sgp4RecordOf } from '../../src/elements/sgp4-record.js';
import { SLAB_S } from '../../src/ephemeris/node-spacing.js';
import { loadSgp4 } from '../../src/ephemeris/sgp4-module.js';
import { sgp4RecordsOf } from '../../src/ephemeris/sgp4-records.js';
import { timeBelow } from '../../src/ephemeris/time-below.js';
import { syntheticCatalog } from '../synthetic/catalog.js';
import { sgp4StateAt } from './sgp4-state.js';

const START_MS = Date.UTC(2026, 11, 1);
const SLAB_MS = SLAB_S * 1000;

beforeAll(loadSgp4);

it.each([7000, 7800, 12_000])('holds every moment that SGP4 has an object below %i km', (radiusKm) => {
  const sets = syntheticCatalog({
    seed: 91,
    count: 90,
    epochMs: START_MS,
    mix: { low: 0.1, eccentric: 0.8, medium: 0.05, geosynchronous: 0.05, decaying: 0, train: 0 },
  });
  const records = sgp4RecordsOf(sets);
  const state = new Float64Array(6);
  let none = 0;
  let short = 0;
  let below = 0;
  for (const [place, set] of sets.entries()) {
    const record = sgp4RecordOf(set);
    for (const slab of [0, 1, 2, 3, 20, 41]) {
      const fromMs = START_MS + slab * SLAB_MS;
      const found = timeBelow(records, place, radiusKm, fromMs, fromMs + SLAB_MS);
      if (found === undefined) none++;
      else if (found.toMs - found.fromMs < SLAB_MS / 2) short++;
      for (let k = 0; k <= 120; k++) {
        const timeMs = fromMs + (SLAB_MS * k) / 120;
        if (!sgp4StateAt(record, set.epochMs, timeMs, state)) continue;
        if (Math.hypot(state[0], state[1], state[2]) > radiusKm) continue;
        below++;
        expect(found).toBeDefined();
        expect(timeMs).toBeGreaterThanOrEqual(found?.fromMs ?? Number.NaN);
        expect(timeMs).toBeLessThanOrEqual(found?.toMs ?? Number.NaN);
      }
    }
  }
  expect(none).toBeGreaterThan(30);
  expect(short).toBeGreaterThan(30);
  expect(below).toBeGreaterThan(400);
});
