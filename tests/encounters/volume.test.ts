import { beforeAll, describe, expect, it } from 'vitest';
import { enclosingRadiusKm, passageThrough, type ScreeningVolume } from '../../src/encounters/volume.js';
import { loadSgp4 } from '../../src/ephemeris/sgp4-module.js';
import { sgp4RecordsOf } from '../../src/ephemeris/sgp4-records.js';
import { syntheticCatalog } from '../synthetic/catalog.js';
import { bruteForceEncounters, bruteForcePassages } from './brute-force.js';

const START_MS = Date.UTC(2026, 11, 1);
const END_MS = START_MS + 8 * 3_600_000;

beforeAll(loadSgp4);

describe('passageThrough', () => {
  it.each(['BOX', 'ELLIPSOID'] as const)('%s: finds the passages of brute force, entry and exit', (shape) => {
    const volume: ScreeningVolume = { shape, halfSizeRtnKm: [30, 150, 100] };
    const first = syntheticCatalog({ seed: 41, count: 100, epochMs: START_MS });
    const window = { first, startMs: START_MS, endMs: END_MS };
    const passages = bruteForcePassages({
      ...window,
      volume: { shape: shape === 'BOX' ? 'box' : 'ellipsoid', halfSizesKm: volume.halfSizeRtnKm },
    });
    const approaches = bruteForceEncounters({ ...window, missKm: enclosingRadiusKm(volume) });
    const records = sgp4RecordsOf(first);
    const side = (place: number) => ({ records, place });
    let inside = 0;
    let outside = 0;
    for (const { i, j, tcaMs, relativeSpeedKmPerS } of approaches) {
      // A slow pair can leave and come back between two minima, which is not told apart.
      if (relativeSpeedKmPerS < 0.05) continue;
      const found = passageThrough(side(i), side(j), tcaMs, relativeSpeedKmPerS, volume, START_MS, END_MS);
      const spanMs = (1000 * enclosingRadiusKm(volume)) / relativeSpeedKmPerS;
      const expected = passages.find(
        (p) => p.i === i && p.j === j && p.entryMs < tcaMs + spanMs && p.exitMs > tcaMs - spanMs,
      );
      expect(found === undefined).toBe(expected === undefined);
      if (found === undefined || expected === undefined) {
        outside++;
        continue;
      }
      inside++;
      expect(Math.abs(found.entryMs - expected.entryMs)).toBeLessThan(1);
      expect(Math.abs(found.exitMs - expected.exitMs)).toBeLessThan(1);
    }
    expect(inside).toBeGreaterThan(5);
    expect(outside).toBeGreaterThan(5);
  });

  it('gives the radius of the sphere around each shape', () => {
    expect(enclosingRadiusKm({ shape: 'SPHERE', missKm: 5 })).toBe(5);
    expect(enclosingRadiusKm({ shape: 'BOX', halfSizeRtnKm: [2, 3, 6] })).toBe(7);
    expect(enclosingRadiusKm({ shape: 'ELLIPSOID', halfSizeRtnKm: [2, 3, 6] })).toBe(6);
  });
});
