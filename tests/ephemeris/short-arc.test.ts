import { beforeAll, describe, expect, it } from 'vitest';
import { sgp4RecordOf } from '../../src/elements/sgp4-record.js';
import { loadSgp4 } from '../../src/ephemeris/sgp4-module.js';
import { sgp4RecordsOf } from '../../src/ephemeris/sgp4-records.js';
import { createShortArc } from '../../src/ephemeris/short-arc.js';
import { syntheticCatalog } from '../synthetic/catalog.js';
import { seededRandom } from '../synthetic/random.js';
import { sgp4StateAt } from './sgp4-state.js';

const START_MS = Date.UTC(2026, 11, 1);

beforeAll(loadSgp4);

describe('createShortArc', () => {
  it('agrees with SGP4 to a millimeter and 0.01 mm/s, in all kinds of orbits, at nodes and between', () => {
    const random = seededRandom(51);
    const truth = new Float64Array(6);
    let compared = 0;
    for (const set of syntheticCatalog({ seed: 51, count: 300, epochMs: START_MS })) {
      const record = sgp4RecordOf(set);
      const arc = createShortArc(sgp4RecordsOf([set]), 0, START_MS);
      for (const offsetMs of [0, 120_000, random.between(-600_000, 600_000)]) {
        const state = arc(START_MS + offsetMs);
        if (!sgp4StateAt(record, set.epochMs, START_MS + offsetMs, truth)) continue;
        if (state === undefined) continue;
        compared++;
        for (let axis = 0; axis < 3; axis++) {
          expect(Math.abs(state.positionKm[axis] - truth[axis])).toBeLessThan(1e-6);
          expect(Math.abs(state.velocityKmPerS[axis] - truth[3 + axis])).toBeLessThan(1e-8);
        }
      }
    }
    expect(compared).toBeGreaterThan(850);
  });

  it('has no state where SGP4 has none', () => {
    const [set] = syntheticCatalog({ seed: 52, count: 1, epochMs: START_MS });
    const records = sgp4RecordsOf([{ ...set, eccentricity: 0.001, meanMotionRevPerDay: 16.4, bstar: 0.5 }]);
    const timeMs = START_MS + 40 * 86_400_000;
    expect(createShortArc(records, 0, timeMs)(timeMs)).toBeUndefined();
  });
});
