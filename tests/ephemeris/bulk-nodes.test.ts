import type { SatRec } from 'satellite.js';
import { beforeAll, describe, expect, it, vi } from 'vitest';
import { sgp4RecordOf } from '../../src/elements/sgp4-record.js';
import { createBulkNodes, loadBulkPropagator } from '../../src/ephemeris/bulk-nodes.js';
import { setRecords } from '../../src/ephemeris/bulk-records.js';
import { syntheticCatalog } from '../synthetic/catalog.js';

const START_MS = Date.UTC(2026, 11, 1);
const TIMES_MS = [START_MS, START_MS + 3_600_000, START_MS + 5 * 86_400_000];

const records = syntheticCatalog({ seed: 71, count: 200, epochMs: START_MS }).map(sgp4RecordOf);

beforeAll(loadBulkPropagator);

/** State by state; only the error where there is none. */
function statesOf(given: readonly SatRec[]): number[][] {
  const bulk = createBulkNodes(given, TIMES_MS.length);
  const { position, velocity, error } = bulk.statesAt(TIMES_MS);
  const states = Array.from(error, (code, k) =>
    code === 0 ? [...position.slice(3 * k, 3 * k + 3), ...velocity.slice(3 * k, 3 * k + 3)] : [code],
  );
  bulk.dispose();
  return states;
}

describe('bulk nodes', () => {
  it('are the same to the last bit for records in a crowd and one by one', () => {
    const together = statesOf(records);
    const alone = records.flatMap((record) => statesOf([record]));
    expect(records.some(({ method }) => method === 'd')).toBe(true);
    expect(together).toEqual(alone);
  });

  it('are handed over by satellite.js alone where its records are laid out otherwise', () => {
    const size = 16;
    const heap = new ArrayBuffer(size * 8);
    const module = {
      HEAP8: new Int8Array(heap),
      _get_elsetrec_size: () => size,
      _create_elsetrec_struct_layout_string_pointer: () => 0,
      _free_struct_layout_string: () => undefined,
      UTF8ToString: () => '[["ecco","double",0,8]]',
    };
    const setSatRecs = vi.fn((given: readonly unknown[]) => {
      // This one keeps a running number in each record, which no copy of the first would have.
      given.forEach((_, k) => {
        new DataView(heap).setFloat64(k * size + 8, k, true);
      });
    });
    setRecords({ setSatRecs, ...{ satrecsPointer: 0 } }, module as never, records.slice(0, 5));
    expect(setSatRecs.mock.calls.at(-1)?.[0]).toEqual(records.slice(0, 5));
  });
});
