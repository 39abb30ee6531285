import { expect, test } from 'vitest';
import { packObjects, unpackObjects } from '../../src/jobs/packed-objects.js';
import { defaultSigmaTable } from '../../src/uncertainty/default-sigma-table.js';

test('packed objects come out of another thread as they were', () => {
  const { classes } = defaultSigmaTable();
  const objects = Array.from({ length: 40 }, (_, i) => ({
    designator: String(900_000_000 + i),
    name: i % 5 === 0 ? '' : `LARKSPUR ${i}`,
    curve: classes[(7 * i) % classes.length].curve,
    hardBodyRadiusM: 0.5 + i,
    agesFromMs: Date.UTC(2026, 11, 1) - 1000.25 * i,
  }));
  const packed = structuredClone(packObjects(objects));
  expect(packed.curves.length).toBeLessThanOrEqual(classes.length);
  expect(unpackObjects(packed)).toEqual(objects);
  expect(unpackObjects(packObjects([]))).toEqual([]);
});
