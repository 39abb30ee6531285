import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { beforeAll, describe, expect, it } from 'vitest';
import { readElementFiles } from '../../src/elements/read.js';
import { sgp4RecordOf } from '../../src/elements/sgp4-record.js';
import { slabCount } from '../../src/encounters/search-problem.js';
import { createSlabSearcher, searchSlab } from '../../src/encounters/search-slab.js';
import { loadSgp4 } from '../../src/ephemeris/sgp4-module.js';
import { searchObjectsOf } from '../encounters/search-objects.js';
import { sgp4StateAt } from '../ephemeris/sgp4-state.js';

/*
 * The accidental collision of 10 February 2009, from the last public element sets before it. Figures: worked
 * out from these sets with python3-sgp4 2.15 (WGS-72) and SciPy, which share no code with this project. What
 * is published of the event: 16:55:59.806 UTC, closing speed 11.70 km/s.
 */
const SETS = `1 24946U 97051C   09040.78448243 +.00000153 +00000-0 +47668-4 0  9994
2 24946 086.3994 121.7028 0002288 085.1644 274.9812 14.34219863597336
1 22675U 93036A   09040.49834364 -.00000001  00000-0  95251-5 0  9996
2 22675 074.0355 019.4646 0016027 098.7014 261.5952 14.31135643817415
`;
const TCA_MS = Date.UTC(2009, 1, 10, 16, 55, 59, 796);
const MISS_KM = 0.698;
const SPEED_KM_PER_S = 11.647;

beforeAll(loadSgp4);

describe('the collision of 10 February 2009', () => {
  it('is found in its window within 20 ms, 1 m and 1 m/s of the independent figures', async () => {
    const folder = mkdtempSync(join(tmpdir(), 'collision-'));
    const file = join(folder, 'two.tle');
    writeFileSync(file, SETS);
    const { sets, rejected } = await readElementFiles([file]);
    rmSync(folder, { recursive: true });
    expect(rejected).toEqual([]);
    expect(sets.map(({ designator }) => designator)).toEqual(['24946', '22675']);

    const rules = {
      startMs: Date.UTC(2009, 1, 10, 12),
      endMs: Date.UTC(2009, 1, 11),
      missKm: 5,
      withinPrimaries: true,
      skippedPairs: new Set<number>(),
    };
    const searcher = createSlabSearcher(searchObjectsOf(sets, 2), rules);
    const found = Array.from(
      { length: slabCount(rules) },
      (_, slab) => searchSlab(searcher, slab).approaches,
    ).flat();
    const [collision] = found.filter(({ tcaMs }) => Math.abs(tcaMs - TCA_MS) < 60_000);
    expect(Math.abs(collision.tcaMs - TCA_MS)).toBeLessThan(20);
    expect(Math.abs(collision.missKm - MISS_KM)).toBeLessThan(1e-3);

    const states = new Float64Array(12);
    sets.forEach((set, i) => {
      expect(sgp4StateAt(sgp4RecordOf(set), set.epochMs, collision.tcaMs, states, 6 * i)).toBe(true);
    });
    const speed = Math.hypot(states[9] - states[3], states[10] - states[4], states[11] - states[5]);
    expect(Math.abs(speed - SPEED_KM_PER_S)).toBeLessThan(1e-3);
  });
});
