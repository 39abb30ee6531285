import type { SatRec } from 'satellite.js';
import { beforeAll, describe, expect, it } from 'vitest';
import { orbitOf } from '../../src/elements/orbit.js';
import { sgp4RecordOf } from '../../src/elements/sgp4-record.js';
import { SLAB_S } from '../../src/ephemeris/node-spacing.js';
import { recordStateAt } from '../../src/ephemeris/record-states.js';
import { SEGMENT_SIZE } from '../../src/ephemeris/septic.js';
import { loadSgp4 } from '../../src/ephemeris/sgp4-module.js';
import type { Sgp4Records } from '../../src/ephemeris/sgp4-records.js';
import { sgp4RecordsOf } from '../../src/ephemeris/sgp4-records.js';
import { type CursorRoom, createTrackCursor, stateOnTrack } from '../../src/ephemeris/track-cursor.js';
import { createTrackMaker, type TrackedObject } from '../../src/ephemeris/tracks.js';
import { type CatalogMix, syntheticCatalog } from '../synthetic/catalog.js';
import { seededRandom } from '../synthetic/random.js';
import { move } from './motion-under-gravity.js';
import { sgp4StateAt } from './sgp4-state.js';

const START_MS = Date.UTC(2026, 11, 1);
const DAY_MS = 86_400_000;
const NOTHING: CatalogMix = { low: 0, eccentric: 0, medium: 0, geosynchronous: 0, decaying: 0, train: 0 };

function createCursorRoom(objectCount: number): CursorRoom {
  return {
    coefficients: new Float64Array(SEGMENT_SIZE * objectCount),
    segmentStartS: new Float64Array(objectCount),
    segmentEndS: new Float64Array(objectCount),
  };
}

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
        // Half the longest step further on, where nothing but gravity is left to follow from the rate of positions.
        const [position, ...earlier] = [0, 250, 500].map((ms) => {
          sgp4StateAt(record, epochMs, endMs - ms, state);
          return [...state.subarray(0, 3)];
        });
        const rate = position.map((x, axis) => (3 * x - 4 * earlier[0][axis] + earlier[1][axis]) / 0.5);
        const coasted = move([...position, ...rate], 150);
        stateOnTrack(cursor, object, endS + 150, state, 0);
        const offKm = Math.hypot(...[0, 1, 2].map((axis) => state[axis] - coasted[axis]));
        // SGP4's velocity may be off that by 8 m/s, and its drag near the end is not gravity's motion.
        expect(offKm).toBeLessThan(1.6);
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

  it('hold where the velocities of old elements are far from the rates of their positions', () => {
    // Years old, low at perigee, much drag: SGP4 goes on with them, for what it is worth.
    const sets = [0.02, 0.05, 0.1, 0.15, 0.25].flatMap((bstar) =>
      [400, 700, 1000, 1300].map((ageDays) => ({
        epochMs: START_MS - ageDays * DAY_MS,
        meanMotionRevPerDay: 4.25,
        eccentricity: 0.58,
        inclinationDeg: 28,
        rightAscensionDeg: 40,
        argumentOfPerigeeDeg: 100,
        meanAnomalyDeg: 200,
        bstar,
      })),
    );
    const records = sgp4RecordsOf(sets);
    const objects = sets.map(({ eccentricity }, place) => ({ place, eccentricity, perigeeRadiusKm: 6700 }));
    const { tracksOf } = createTrackMaker(records, objects);
    const states = [0, 0, 0].map(() => new Float64Array(6));
    const onTrack = new Float64Array(6);
    let worstKmPerS = 0;
    let compared = 0;
    for (const slab of [0, 1, 2]) {
      const startMs = START_MS + slab * SLAB_S * 1000;
      const tracks = tracksOf(startMs, slab);
      const cursor = createTrackCursor(tracks, createCursorRoom(objects.length));
      for (let place = 0; place < sets.length; place++) {
        for (let timeS = 7; timeS < tracks.endS[place] - 1; timeS += 61) {
          const isThere = [-100, 0, 100].every((ms, k) =>
            recordStateAt(records, place, startMs + timeS * 1000 + ms, states[k]),
          );
          if (!isThere) continue;
          compared++;
          const off = [0, 1, 2].map(
            (axis) => (states[2][axis] - states[0][axis]) / 0.2 - states[1][3 + axis],
          );
          worstKmPerS = Math.max(worstKmPerS, Math.hypot(...off));
          stateOnTrack(cursor, place, timeS, onTrack, 0);
          const km = Math.hypot(...[0, 1, 2].map((axis) => onTrack[axis] - states[1][axis]));
          expect(km).toBeLessThan(tracks.toleranceKm[place]);
        }
      }
    }
    expect(compared).toBeGreaterThan(1000);
    expect(worstKmPerS).toBeGreaterThan(0.3);
  });
});
