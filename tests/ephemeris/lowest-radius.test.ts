import { beforeAll, expect, it } from 'vitest';
import { sgp4RecordOf } from '../../src/elements/sgp4-record.js';
import { lowestRadiusKm } from '../../src/ephemeris/lowest-radius.js';
import { SLAB_S } from '../../src/ephemeris/node-spacing.js';
import { loadSgp4 } from '../../src/ephemeris/sgp4-module.js';
import { sgp4StateAt } from '../../src/ephemeris/sgp4-state.js';
import { sgp4RecordsOf } from '../../src/jobs/screened-object.js';
import { syntheticCatalog } from '../synthetic/catalog.js';

const START_MS = Date.UTC(2026, 11, 1);
const SLAB_MS = SLAB_S * 1000;

beforeAll(loadSgp4);

it('is below every radius that SGP4 gives in a slab, and far up away from perigee', () => {
  const sets = syntheticCatalog({
    seed: 91,
    count: 120,
    epochMs: START_MS,
    mix: { low: 0.1, eccentric: 0.8, medium: 0.05, geosynchronous: 0.05, decaying: 0, train: 0 },
  });
  const state = new Float64Array(6);
  let high = 0;
  for (const set of sets) {
    const record = sgp4RecordOf(set);
    const records = sgp4RecordsOf([set]);
    for (const slab of [0, 1, 2, 3, 20, 41]) {
      const fromMs = START_MS + slab * SLAB_MS;
      const lowest = lowestRadiusKm(records, 0, fromMs, fromMs + SLAB_MS);
      if (lowest > 9000) high++;
      for (let k = 0; k <= 120; k++) {
        if (!sgp4StateAt(record, set.epochMs, fromMs + (SLAB_MS * k) / 120, state)) continue;
        expect(Math.hypot(state[0], state[1], state[2])).toBeGreaterThan(lowest);
      }
    }
  }
  expect(high).toBeGreaterThan(100);
});
