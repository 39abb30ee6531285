import { readdirSync, statSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, describe, expect, test } from 'vitest';
import type { ElementSet } from '../../../src/elements/element-set.js';
import { objectHistories } from '../../../src/jobs/calibrate/object-histories.js';
import {
  createPartitions,
  PARTITION_COUNT,
  partitionOf,
  readPartition,
} from '../../../src/jobs/calibrate/partitions.js';
import {
  designatorAt,
  elementsAt,
  fileAt,
  isStorableDesignator,
  lineAt,
  RECORD_BYTES,
  setRecordsOver,
  writeRecord,
} from '../../../src/jobs/calibrate/set-records.js';
import { newFolder, removeFolders } from './run-calibration.js';

const EPOCH_MS = Date.UTC(2030, 0, 1);

function set(designator: number, day: number, line: number, changes: Partial<ElementSet> = {}): ElementSet {
  return {
    designator: String(designator),
    name: '',
    internationalDesignator: '',
    epochMs: EPOCH_MS + day * 86_400_000,
    meanMotionRevPerDay: 14.5,
    eccentricity: 0.001,
    inclinationDeg: 55,
    rightAscensionDeg: 10,
    argumentOfPerigeeDeg: 20,
    meanAnomalyDeg: 30,
    bstar: 1e-5,
    source: { file: 'a.tle', line, text: '' },
    ...changes,
  };
}

function historiesOf(sets: readonly ElementSet[]) {
  const records = setRecordsOver(new ArrayBuffer(sets.length * RECORD_BYTES));
  sets.forEach((each, i) => {
    writeRecord(records, i, each, 0);
  });
  return [...objectHistories(records)];
}

afterAll(removeFolders);

describe('partitions', () => {
  test('200 000 sets: none holds more than twice its share, so memory stays a small part of the whole', async () => {
    const folder = newFolder();
    const partitions = createPartitions(folder);
    const count = 200_000;
    // Catalog numbers run in a row, as in a real catalog.
    for (let i = 0; i < count; i++) partitions.add(set(310_000 + (i % 2000), Math.floor(i / 2000), i + 1), 3);
    partitions.finish();
    const sizes = readdirSync(folder).map((name) => statSync(join(folder, name)).size);
    expect(sizes).toHaveLength(PARTITION_COUNT);
    expect(sizes.reduce((sum, size) => sum + size, 0)).toBe(count * RECORD_BYTES);
    expect(Math.max(...sizes)).toBeLessThan((2 * count * RECORD_BYTES) / PARTITION_COUNT);

    let seen = 0;
    const objects = new Set<number>();
    for (let partition = 0; partition < PARTITION_COUNT; partition++) {
      for (const { designator, sets } of objectHistories(await readPartition(folder, partition))) {
        expect(objects.has(designator)).toBe(false);
        objects.add(designator);
        expect(sets).toHaveLength(100);
        seen += sets.length;
      }
    }
    expect(seen).toBe(count);
    expect(objects.size).toBe(2000);
  });

  test('every designator of nine digits has a partition', () => {
    for (const designator of [0, 1, 5, 99_999, 339_999, 999_999_999, 4_294_967_295]) {
      const partition = partitionOf(designator);
      expect(Number.isInteger(partition) && partition >= 0 && partition < PARTITION_COUNT).toBe(true);
    }
    expect(isStorableDesignator('999999999')).toBe(true);
    expect(isStorableDesignator('4294967296')).toBe(false);
    expect(isStorableDesignator('A0001')).toBe(false);
    expect(isStorableDesignator('')).toBe(false);
  });

  test('a set comes back with every bit of it', async () => {
    const folder = newFolder();
    const partitions = createPartitions(folder);
    const original = set(999_999_999, 0.123_456_789_1, 4_000_000_000, { bstar: -1.234_567e-5 });
    partitions.add(original, 77);
    partitions.finish();
    const records = await readPartition(folder, partitionOf(999_999_999));
    expect(records.count).toBe(1);
    expect(designatorAt(records, 0)).toBe(999_999_999);
    expect(fileAt(records, 0)).toBe(77);
    expect(lineAt(records, 0)).toBe(4_000_000_000);
    expect(original).toMatchObject(elementsAt(records, 0));
  });
});

describe('histories of objects', () => {
  test('by object and epoch, whatever the order', () => {
    const found = historiesOf([set(2, 3, 1), set(1, 5, 2), set(2, 1, 3), set(1, 4, 4)]);
    expect(found.map(({ designator, sets }) => [designator, sets])).toEqual([
      [1, [3, 1]],
      [2, [2, 0]],
    ]);
  });

  test('copies collapse to the first of them, also with epochs half a millisecond apart', () => {
    const close = set(1, 0, 2);
    const [history] = historiesOf([
      set(1, 0, 3),
      { ...close, epochMs: close.epochMs + 0.4 },
      set(1, 0, 1),
      set(1, 2, 9),
    ]);
    expect(history).toEqual({ designator: 1, sets: [2, 3], copies: [0, 1], superseded: [] });
  });

  test('of different elements at one epoch the same stays, whatever the order and the copies', () => {
    const a = set(1, 0, 1);
    const b = set(1, 0, 2, { bstar: 2e-5 });
    expect(historiesOf([a, b])[0]).toEqual({
      designator: 1,
      sets: [1],
      copies: [],
      superseded: [{ set: 0, by: 1 }],
    });
    expect(historiesOf([b, a])[0].sets).toEqual([0]);
    const later = { ...a, epochMs: a.epochMs + 0.4 };
    expect(historiesOf([later, b, a])[0]).toMatchObject({
      sets: [1],
      copies: [0],
      superseded: [{ set: 2, by: 1 }],
    });
  });

  test('two milliseconds apart are two sets', () => {
    const other = set(1, 0, 2);
    expect(historiesOf([set(1, 0, 1), { ...other, epochMs: other.epochMs + 2 }])[0].sets).toHaveLength(2);
  });
});
