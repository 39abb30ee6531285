import { BulkPropagator, createSingleThreadRuntime, EciBaseCalculator, sgp4 } from 'satellite.js';
import { beforeAll, describe, expect, it } from 'vitest';
import { sgp4RecordOf } from '../../src/elements/sgp4-record.js';
import {
  MEAN_ANOMALY,
  MEAN_AXIS,
  MEAN_ECCENTRICITY,
  MEAN_MOTION,
  recordMeansAt,
  recordPositionsAt,
  recordStateAt,
} from '../../src/ephemeris/record-states.js';
import { loadSgp4 } from '../../src/ephemeris/sgp4-module.js';
import { gatherRecords, pickRecords, sgp4RecordsOf } from '../../src/ephemeris/sgp4-records.js';
import { syntheticCatalog } from '../synthetic/catalog.js';
import { seededRandom } from '../synthetic/random.js';
import { sgp4StateAt } from './sgp4-state.js';

const START_MS = Date.UTC(2026, 11, 1);
const DAY_MS = 86_400_000;
const sets = syntheticCatalog({ seed: 72, count: 400, epochMs: START_MS });

beforeAll(loadSgp4);

describe('states of single records', () => {
  it('are those of SGP4 in JavaScript, in all kinds of orbits, and missing where they are', () => {
    const records = sgp4RecordsOf(sets);
    const own = sets.map(sgp4RecordOf);
    const random = seededRandom(73);
    const [found, expected] = [new Float64Array(6), new Float64Array(6)];
    let compared = 0;
    let missing = 0;
    for (let k = 0; k < 4000; k++) {
      const place = random.integer(sets.length);
      const timeMs = START_MS + random.between(0, 10 * DAY_MS);
      const isThere = recordStateAt(records, place, timeMs, found);
      expect(isThere).toBe(sgp4StateAt(own[place], sets[place].epochMs, timeMs, expected));
      if (!isThere) {
        missing++;
        continue;
      }
      compared++;
      const km = Math.hypot(...[0, 1, 2].map((axis) => found[axis] - expected[axis]));
      const kmPerS = Math.hypot(...[3, 4, 5].map((axis) => found[axis] - expected[axis]));
      // Days since the origin resolve a nanosecond: 1e-8 km.
      expect(km).toBeLessThan(3e-8);
      expect(kmPerS).toBeLessThan(3e-11);
    }
    expect(compared).toBeGreaterThan(3500);
    expect(missing).toBeGreaterThan(20);
  });

  it('do not hang on what was asked before, resonances included', () => {
    const mix = { low: 0, eccentric: 0.5, medium: 0.2, geosynchronous: 0.3, decaying: 0, train: 0 };
    const deep = sgp4RecordsOf(syntheticCatalog({ seed: 74, count: 60, epochMs: START_MS, mix }));
    const ask = (place: number, timeMs: number) => {
      const state = new Float64Array(6);
      recordStateAt(deep, place, timeMs, state);
      return [...state];
    };
    for (let place = 0; place < 60; place++) {
      const first = ask(place, START_MS + 20 * DAY_MS);
      ask(place, START_MS + 20.3 * DAY_MS);
      ask(place, START_MS - 3 * DAY_MS);
      expect(ask(place, START_MS + 20 * DAY_MS)).toEqual(first);
    }
  });

  it('have the positions that a series of times gives, and none where it gives none', () => {
    const records = sgp4RecordsOf(sets);
    const state = new Float64Array(6);
    const positions = new Float64Array(3 * 12 + 3);
    let compared = 0;
    let missing = 0;
    for (let place = 0; place < sets.length; place++) {
      recordPositionsAt(records, place, START_MS, 0.9 * DAY_MS, 12, positions, 3);
      for (let k = 0; k < 12; k++) {
        const [x, y, z] = positions.subarray(3 + 3 * k);
        if (!recordStateAt(records, place, START_MS + k * 0.9 * DAY_MS, state)) {
          missing++;
          expect([x, y, z]).toEqual([Number.NaN, Number.NaN, Number.NaN]);
          continue;
        }
        compared++;
        expect(Math.hypot(x - state[0], y - state[1], z - state[2])).toBeLessThan(1e-7);
      }
    }
    expect(compared).toBeGreaterThan(4000);
    expect(missing).toBeGreaterThan(20);
    expect(() => recordPositionsAt(records, 0, START_MS, 1, 17, positions, 0)).toThrow('17 times');
  });

  it('are the same to a nanosecond where times count from elsewhere', () => {
    const records = sgp4RecordsOf(sets);
    const epochs = sets.map(({ epochMs }) => epochMs);
    const placed = sets.map((_, place) => ({ records, place }));
    const moved = gatherRecords(placed, epochs, START_MS + 3 * DAY_MS);
    const [one, other] = [new Float64Array(6), new Float64Array(6)];
    for (let place = 0; place < sets.length; place++) {
      if (!recordStateAt(records, place, START_MS, one)) continue;
      expect(recordStateAt(moved, place, START_MS, other)).toBe(true);
      expect(Math.hypot(...[0, 1, 2].map((axis) => one[axis] - other[axis]))).toBeLessThan(1e-8);
    }
  });

  it('come with the mean elements that SGP4 in JavaScript has', () => {
    const records = sgp4RecordsOf(sets);
    const means = new Float64Array(4);
    let compared = 0;
    for (const [place, set] of sets.entries()) {
      const timeMs = START_MS + 2 * DAY_MS;
      const expected = sgp4(sgp4RecordOf(set), (timeMs - set.epochMs) / 60_000)?.meanElements;
      if (!recordMeansAt(records, place, timeMs, means) || expected === undefined) continue;
      compared++;
      expect(means[MEAN_AXIS]).toBeCloseTo(expected.am, 12);
      expect(means[MEAN_ECCENTRICITY]).toBeCloseTo(expected.em, 12);
      expect(means[MEAN_ANOMALY]).toBeCloseTo(expected.mm, 9);
      expect(means[MEAN_MOTION]).toBeCloseTo(expected.nm, 12);
    }
    expect(compared).toBeGreaterThan(350);
  });

  it('are of the records that are asked, where two share a place', () => {
    const records = sgp4RecordsOf(sets);
    const picked = pickRecords(records, Int32Array.of(7, 3));
    const [one, other] = [new Float64Array(6), new Float64Array(6)];
    for (const [place, original] of [
      [0, 7],
      [1, 3],
    ]) {
      recordStateAt(records, place, START_MS, one);
      recordStateAt(picked, place, START_MS, one);
      recordStateAt(records, original, START_MS, other);
      expect([...one]).toEqual([...other]);
    }
  });
});

describe('laySgp4Record', () => {
  it('lays every number that satellite.js hands to its own propagator', async () => {
    const own = sets.map(sgp4RecordOf);
    const { values, size } = sgp4RecordsOf(sets);
    const count = sets.length;
    const runtime = await createSingleThreadRuntime();
    const propagator = new BulkPropagator({
      runtime,
      calculators: [new EciBaseCalculator()],
      satRecsCount: count,
      datesCount: 1,
    });
    propagator.setSatRecs(own);
    const { satrecsPointer } = propagator as unknown as { satrecsPointer: number };
    const expected = runtime.module.HEAPF64.slice(satrecsPointer / 8, satrecsPointer / 8 + size * count);
    const text = runtime.module.UTF8ToString(runtime.module._create_elsetrec_struct_layout_string_pointer());
    const names: readonly string[] = JSON.parse(text)
      .filter(([name, type]: [string, string]) => type === 'double' && !name.startsWith('jdsatepoch'))
      .map(([name]: [string]) => name);
    const placeOf = new Map<string, number>(
      JSON.parse(text).map(([name, , offset]: [string, string, number]) => [name, offset / 8]),
    );
    expect(names.length).toBeGreaterThan(90);
    for (let k = 0; k < count; k++) {
      const laid = names.map((name) => values[size * k + (placeOf.get(name) as number)]);
      expect(laid).toEqual(names.map((name) => expected[size * k + (placeOf.get(name) as number)]));
    }
    propagator.dispose();
  });
});
