import type { SatRec } from 'satellite.js';
import { beforeAll, describe, expect, it } from 'vitest';
import { orbitOf } from '../../src/elements/orbit.js';
import { sgp4RecordOf } from '../../src/elements/sgp4-record.js';
import { SLAB_S } from '../../src/ephemeris/node-spacing.js';
import { loadSgp4 } from '../../src/ephemeris/sgp4-module.js';
import type { Sgp4Records } from '../../src/ephemeris/sgp4-records.js';
import { sgp4StateAt } from '../../src/ephemeris/sgp4-state.js';
import { createCursorRoom, createTrackCursor, stateOnTrack } from '../../src/ephemeris/track-cursor.js';
import { createTrackMaker, type TrackedObject } from '../../src/ephemeris/tracks.js';
import { sgp4RecordsOf } from '../../src/jobs/screened-object.js';
import { type CatalogMix, syntheticCatalog } from '../synthetic/catalog.js';
import { seededRandom } from '../synthetic/random.js';
import { move } from './motion-under-gravity.js';

const START_MS = Date.UTC(2026, 11, 1);
const DAY_MS = 86_400_000;
const NOTHING: CatalogMix = { low: 0, eccentric: 0, medium: 0, geosynchronous: 0, decaying: 0, train: 0 };

type Known = TrackedObject & { readonly record: SatRec; readonly epochMs: number };

function trackedObjects(
  mix: CatalogMix,
  count: number,
  seed: number,
): { records: Sgp4Records; objects: Known[] } {
  const sets = syntheticCatalog({ seed, count, epochMs: START_MS, mix });
  const objects = sets.map((set, place) => {
    const record = sgp4RecordOf(set);
    return {
      place,
      record,
      epochMs: set.epochMs,
      eccentricity: set.eccentricity,
      perigeeRadiusKm: orbitOf(set, record).perigeeHeightKm + 6378.135,
    };
  });
  return { records: sgp4RecordsOf(sets), objects };
}

beforeAll(loadSgp4);

describe('tracks', () => {
  const kinds = Object.keys(NOTHING) as (keyof CatalogMix)[];
  it.each(kinds)('stay within their tolerance of SGP4: %s', (kind) => {
    const { records, objects } = trackedObjects({ ...NOTHING, [kind]: 1 }, 60, 7);
    const random = seededRandom(8);
    const { tracksOf } = createTrackMaker(records, objects);
    const truth = new Float64Array(6);
    const onTrack = new Float64Array(6);
    let compared = 0;
    let failures = 0;
    let wide = 0;
    let worst = 0;
    let worstSpeed = 0;
    for (const slab of [0, 1, 17]) {
      const slabStartMs = START_MS + slab * SLAB_S * 1000;
      const tracks = tracksOf(slabStartMs, slab);
      const cursor = createTrackCursor(tracks, createCursorRoom(objects.length));
      objects.forEach(({ record, epochMs }, object) => {
        for (let k = 0; k < 25; k++) {
          const timeS = random.between(0, SLAB_S);
          if (timeS > tracks.endS[object]) continue;
          if (!sgp4StateAt(record, epochMs, slabStartMs + timeS * 1000, truth)) failures++;
          stateOnTrack(cursor, object, timeS, onTrack, 0);
          const [x, y, z, vx, vy, vz] = onTrack.map((value, i) => value - truth[i]);
          const tolerance = tracks.toleranceKm[object];
          const kmPerS = Math.hypot(vx, vy, vz) - 0.003;
          worst = Math.max(worst, Math.hypot(x, y, z) / tolerance);
          worstSpeed = Math.max(worstSpeed, (kmPerS * tracks.segmentS[object]) / (6.5 * tolerance));
          if (Math.hypot(x, y, z) > tolerance / 2) wide++;
          compared++;
        }
      });
    }
    expect(compared).toBeGreaterThan(1000);
    expect(failures).toBe(0);
    // The tolerance is twice what may be measured, and bound 1 of the search counts on 13 E / h of velocity.
    expect(worst).toBeLessThan(1);
    expect(worstSpeed).toBeLessThan(1);
    expect(wide / compared).toBeLessThan(0.03);
  });

  it('end where SGP4 fails, to the millisecond, and coast on from there', () => {
    const { records, objects } = trackedObjects({ ...NOTHING, decaying: 1 }, 300, 9);
    const { tracksOf } = createTrackMaker(records, objects);
    const state = new Float64Array(6);
    let endings = 0;
    let dead = 0;
    for (let slab = 0; slab < 42; slab += 3) {
      const slabStartMs = START_MS + slab * SLAB_S * 1000;
      const tracks = tracksOf(slabStartMs, slab);
      const cursor = createTrackCursor(tracks, createCursorRoom(objects.length));
      objects.forEach(({ record, epochMs }, object) => {
        const endS = tracks.endS[object];
        if (endS === SLAB_S) return;
        if (endS === 0) {
          dead++;
          expect(sgp4StateAt(record, epochMs, slabStartMs, state)).toBe(false);
          return;
        }
        endings++;
        const endMs = Math.round(slabStartMs + endS * 1000);
        expect(sgp4StateAt(record, epochMs, endMs + 1, state)).toBe(false);
        expect(sgp4StateAt(record, epochMs, endMs, state)).toBe(true);
        // Half the longest step further on, where nothing but gravity is left to follow.
        const coasted = move([...state], 150);
        stateOnTrack(cursor, object, endS + 150, state, 0);
        const offKm = Math.hypot(...[0, 1, 2].map((axis) => state[axis] - coasted[axis]));
        // SGP4's drag near its end is not gravity's motion: a few kilometers in 150 s would be wrong still.
        expect(offKm).toBeLessThan(1);
      });
    }
    expect(endings).toBeGreaterThan(10);
    expect(dead).toBeGreaterThan(10);
  });

  it('of one slab do not hang on which slabs came before', () => {
    const { records, objects } = trackedObjects({ ...NOTHING, low: 1, decaying: 1, eccentric: 1 }, 60, 10);
    const { tracksOf } = createTrackMaker(records, objects);
    tracksOf(START_MS, 0);
    tracksOf(START_MS + 5 * DAY_MS, 30);
    const again = tracksOf(START_MS + DAY_MS, 6);
    const fresh = createTrackMaker(records, objects).tracksOf(START_MS + DAY_MS, 6);
    const cursors = [again, fresh].map((tracks) =>
      createTrackCursor(tracks, createCursorRoom(objects.length)),
    );
    expect([...again.endS]).toEqual([...fresh.endS]);
    objects.forEach((_, object) => {
      if (fresh.endS[object] === 0) return;
      const states = cursors.map((cursor) => {
        const state = new Float64Array(6);
        stateOnTrack(cursor, object, 0.7 * fresh.endS[object], state, 0);
        return [...state];
      });
      expect(states[0]).toEqual(states[1]);
    });
  });
});
