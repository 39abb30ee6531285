import { beforeAll, describe, expect, it } from 'vitest';
import { createBulkNodes } from '../../src/ephemeris/bulk-nodes.js';
import { loadSgp4 } from '../../src/ephemeris/sgp4-module.js';
import { sgp4RecordsOf } from '../../src/ephemeris/sgp4-records.js';
import { syntheticCatalog } from '../synthetic/catalog.js';

const START_MS = Date.UTC(2026, 11, 1);
const TIMES_MS = [START_MS, START_MS + 3_600_000, START_MS + 5 * 86_400_000];

const sets = syntheticCatalog({ seed: 71, count: 200, epochMs: START_MS });

beforeAll(loadSgp4);

describe('bulk nodes', () => {
  it('are the same to the last bit for records in a crowd and one by one', () => {
    const records = sgp4RecordsOf(sets);
    const statesOf = (members: readonly number[]) => {
      const bulk = createBulkNodes(records, members, TIMES_MS.length);
      const { position, velocity, error } = bulk.statesAt(TIMES_MS);
      const states = Array.from(error, (code, k) =>
        code === 0 ? [...position.slice(3 * k, 3 * k + 3), ...velocity.slice(3 * k, 3 * k + 3)] : [code],
      );
      bulk.dispose();
      return states;
    };
    const places = sets.map((_, place) => place);
    expect(statesOf(places)).toEqual(places.flatMap((place) => statesOf([place])));
  });

  it('take no more times than they have room for', () => {
    const bulk = createBulkNodes(sgp4RecordsOf(sets.slice(0, 2)), [0, 1], 2);
    expect(() => bulk.statesAt(TIMES_MS)).toThrow('3 times, expected 2');
    bulk.dispose();
  });
});
