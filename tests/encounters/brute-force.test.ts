import { sgp4, twoline2satrec } from 'satellite.js';
import { expect, test } from 'vitest';
import type { ElementSet } from '../../src/elements/element-set.js';
import { sgp4RecordOf } from '../../src/elements/sgp4-record.js';
import { dayOfYearToMs } from '../../src/elements/utc.js';
import { rtnFrame } from '../../src/ephemeris/rtn-frame.js';
import { rotate, type Vector3 } from '../../src/vector.js';
import { meanMotionRevPerDay, syntheticCatalog } from '../synthetic/catalog.js';
import { bruteForceEncounters, bruteForcePassages } from './brute-force.js';

const START_MS = Date.UTC(2026, 11, 1);
const DAY_MS = 86_400_000;

/** Circular polar orbits, alike but for the node; both pass the highest latitude at the same moment. */
function crossingPair(nodesApartDeg: number, axisKm = 7158, inclinationDeg = 89.99): ElementSet[] {
  return [0, nodesApartDeg].map((rightAscensionDeg, index) => ({
    designator: String(900_001 + index),
    name: '',
    internationalDesignator: '',
    epochMs: START_MS,
    meanMotionRevPerDay: meanMotionRevPerDay(axisKm),
    eccentricity: 0.000001,
    inclinationDeg,
    rightAscensionDeg,
    argumentOfPerigeeDeg: 0,
    meanAnomalyDeg: 0,
    bstar: 0,
    source: { file: 'test', line: index + 1, text: '' },
  }));
}

function stateAt(set: ElementSet, ms: number): { position: Vector3; velocity: Vector3 } {
  const state = sgp4(sgp4RecordOf(set), (ms - set.epochMs) / 60_000);
  if (state === null) throw new Error(`${set.designator} fails`);
  const { position: r, velocity: v } = state;
  return { position: [r.x, r.y, r.z], velocity: [v.x, v.y, v.z] };
}

test('circular orbits that cross over the poles meet when and as near as geometry says', () => {
  // Rotating one orbit about the pole by W gives the other, so the distance is 2 rho sin(W/2) with rho the
  // distance from the polar axis, smallest (r cos i) where the argument of latitude is 90 or 270 degrees.
  const axisKm = 7158;
  const [one, two] = crossingPair(90, axisKm);
  const encounters = bruteForceEncounters({
    first: [one, two],
    startMs: START_MS,
    endMs: START_MS + DAY_MS,
    missKm: 5,
  });
  // The published mean motion holds J2's part of the anomaly; the perigee turns by
  // 3/4 n J2 (R/p)^2 (4 - 5 sin^2 i), Kozai 1959. J2 and R: WGS-72.
  const radiansPerS = (one.meanMotionRevPerDay * 2 * Math.PI) / 86_400;
  const latitudeRate = radiansPerS * (1 - 0.75 * 1.082616e-3 * (6378.135 / axisKm) ** 2);
  const expected = Array.from({ length: 40 }, (_, half) => ((half + 0.5) * Math.PI) / latitudeRate).filter(
    (seconds) => seconds <= 86_400,
  );
  expect(encounters.length).toBe(expected.length);
  for (const [index, encounter] of encounters.entries()) {
    expect([encounter.i, encounter.j]).toEqual([0, 1]);
    // Second-order terms of J2 are some 1e-6 of the rate: 0.1 s in a day.
    expect(Math.abs((encounter.tcaMs - START_MS) / 1000 - expected[index])).toBeLessThan(0.2);
    const radiusKm = Math.hypot(...stateAt(one, encounter.tcaMs).position);
    const missKm = 2 * radiusKm * Math.cos((89.99 * Math.PI) / 180) * Math.sin(Math.PI / 4);
    // The short-period term of the inclination, 3/4 J2 (R/p)^2 of its cosine, is left out: 0.07 %.
    expect(Math.abs(encounter.missKm / missKm - 1)).toBeLessThan(0.001);
    const speedKmPerS = Math.sqrt(398_600.8 / radiusKm) * Math.SQRT2;
    expect(Math.abs(encounter.relativeSpeedKmPerS / speedKmPerS - 1)).toBeLessThan(0.003);
  }
});

test('the accidental collision of 10 February 2009', () => {
  // Last public sets before it. Reference: python3-sgp4 2.15 (WGS-72) with SciPy: closest approach
  // 16:55:59.796 UTC, miss 698.0 m, relative speed 11.647 km/s.
  const lines = [
    '1 24946U 97051C   09040.78448243 +.00000153 +00000-0 +47668-4 0  9994',
    '2 24946 086.3994 121.7028 0002288 085.1644 274.9812 14.34219863597336',
    '1 22675U 93036A   09040.49834364 -.00000001  00000-0  95251-5 0  9996',
    '2 22675 074.0355 019.4646 0016027 098.7014 261.5952 14.31135643817415',
  ];
  const sets = [0, 2].map((index): ElementSet => {
    const record = twoline2satrec(lines[index], lines[index + 1]);
    const degrees = 180 / Math.PI;
    return {
      designator: lines[index].slice(2, 7),
      name: '',
      internationalDesignator: '',
      epochMs: dayOfYearToMs(2009, Number(lines[index].slice(20, 32))),
      meanMotionRevPerDay: Number(lines[index + 1].slice(52, 63)),
      eccentricity: record.ecco,
      inclinationDeg: record.inclo * degrees,
      rightAscensionDeg: record.nodeo * degrees,
      argumentOfPerigeeDeg: record.argpo * degrees,
      meanAnomalyDeg: record.mo * degrees,
      bstar: record.bstar,
      source: { file: 'test', line: index + 1, text: '' },
    };
  });
  const encounters = bruteForceEncounters({
    first: [sets[0]],
    second: [sets[1]],
    startMs: Date.UTC(2009, 1, 10),
    endMs: Date.UTC(2009, 1, 11),
    missKm: 5,
  });
  expect(encounters.length).toBe(1);
  expect(Math.abs(encounters[0].tcaMs - Date.UTC(2009, 1, 10, 16, 55, 59, 796))).toBeLessThan(20);
  expect(Math.abs(encounters[0].missKm - 0.698)).toBeLessThan(0.001);
  expect(Math.abs(encounters[0].relativeSpeedKmPerS - 11.647)).toBeLessThan(0.001);
});

test('passing over the grid where nothing can be near loses nothing, and 10 s are fine enough', () => {
  const first = syntheticCatalog({ seed: 21, count: 12, epochMs: START_MS });
  const second = syntheticCatalog({ seed: 22, count: 40, epochMs: START_MS, firstDesignator: 310_000 });
  const endMs = START_MS + 0.1 * DAY_MS;
  const encounters = bruteForceEncounters({ first, second, startMs: START_MS, endMs, missKm: 800 });
  // The plainest search there is: every second of every pair, no pruning.
  const seconds = (endMs - START_MS) / 1000;
  const track = (set: ElementSet) => {
    const record = sgp4RecordOf(set);
    return Array.from({ length: seconds + 1 }, (_, second) => {
      const position = sgp4(record, (START_MS + second * 1000 - set.epochMs) / 60_000)?.position;
      return position === undefined ? [Number.NaN, 0, 0] : [position.x, position.y, position.z];
    });
  };
  const firstTracks = first.map(track);
  const secondTracks = second.map(track);
  const plain: { i: number; j: number; second: number; km: number }[] = [];
  for (const [i, p] of firstTracks.entries()) {
    for (const [j, q] of secondTracks.entries()) {
      const km = p.map((at, k) => Math.hypot(at[0] - q[k][0], at[1] - q[k][1], at[2] - q[k][2]));
      for (let k = 1; k < seconds; k += 1) {
        if (km[k - 1] > km[k] && km[k] <= km[k + 1] && km[k] < 799)
          plain.push({ i, j, second: k, km: km[k] });
      }
    }
  }
  expect(plain.length).toBeGreaterThan(20);
  for (const { i, j, second, km } of plain) {
    const match = encounters.find(
      (encounter) =>
        encounter.i === i &&
        encounter.j === j &&
        Math.abs(encounter.tcaMs - START_MS - second * 1000) <= 1000,
    );
    expect(match?.missKm, `${i} ${j} ${second}`).toBeLessThanOrEqual(km + 1e-9);
  }
  expect(encounters.filter((encounter) => encounter.missKm < 790).length).toBeLessThanOrEqual(plain.length);
});

test('a minimum counts inside the window only, and the edge of the window is none', () => {
  const pair = crossingPair(90);
  const find = (startMs: number, endMs: number) =>
    bruteForceEncounters({ first: pair, startMs, endMs, missKm: 50 }).map((encounter) => encounter.tcaMs);
  const tcaMs = find(START_MS, START_MS + 0.02 * DAY_MS)[0];
  expect(find(tcaMs - 0.2, tcaMs + 60_000).length).toBe(1);
  expect(find(tcaMs - 60_000, tcaMs + 0.2).length).toBe(1);
  expect(find(tcaMs - 63_217, tcaMs + 0.2).length).toBe(1);
  expect(find(tcaMs + 0.2, tcaMs + 60_000)).toEqual([]);
  expect(find(tcaMs - 60_000, tcaMs - 0.2)).toEqual([]);
});

test('the distance limit decides to the meter', () => {
  const pair = crossingPair(90);
  const window = { first: pair, startMs: START_MS, endMs: START_MS + 0.02 * DAY_MS };
  const [{ missKm }] = bruteForceEncounters({ ...window, missKm: 50 });
  expect(bruteForceEncounters({ ...window, missKm: missKm + 0.001 }).length).toBe(1);
  expect(bruteForceEncounters({ ...window, missKm: missKm - 0.001 })).toEqual([]);
});

test('an object that decays is screened until SGP4 fails', () => {
  const pair = crossingPair(90, 6378.135 + 172).map((set) => ({ ...set, bstar: 0.004 }));
  const record = sgp4RecordOf(pair[0]);
  let failsAtS = 0;
  while (sgp4(record, failsAtS / 60) !== null) failsAtS += 1;
  expect(failsAtS).toBeGreaterThan(0.2 * 86_400);
  expect(failsAtS).toBeLessThan(1.5 * 86_400);
  const encounters = bruteForceEncounters({
    first: pair,
    startMs: START_MS,
    endMs: START_MS + 3 * DAY_MS,
    missKm: 5,
  });
  // Two an orbit of some 87 minutes, the last one at most half an orbit before the end.
  expect(encounters.length).toBeGreaterThanOrEqual(Math.floor(failsAtS / 2700));
  const lastS = (encounters[encounters.length - 1].tcaMs - START_MS) / 1000;
  expect(lastS).toBeLessThan(failsAtS);
  expect(lastS).toBeGreaterThan(failsAtS - 2700);
  // The last one counts too where it falls between the last whole grid point and the failure.
  const gapS = failsAtS - lastS;
  const stepS = gapS + 200;
  expect(stepS, 'a grid that still tells one meeting from the next').toBeLessThan(1300);
  const startMs = START_MS + (lastS - 100 - 3 * stepS) * 1000;
  const coarse = bruteForceEncounters({ first: pair, startMs, endMs: startMs + DAY_MS, missKm: 5, stepS });
  expect(coarse[coarse.length - 1].tcaMs).toBeCloseTo(START_MS + lastS * 1000, 0);
});

test('objects with the same elements have no minimum', () => {
  const [one] = crossingPair(90);
  expect(
    bruteForceEncounters({ first: [one, one], startMs: START_MS, endMs: START_MS + DAY_MS, missKm: 5 }),
  ).toEqual([]);
});

test('a spherical volume is entered and left where the distance equals its radius', () => {
  const pair = crossingPair(90);
  const window = { first: pair, startMs: START_MS, endMs: START_MS + 0.1 * DAY_MS };
  const encounters = bruteForceEncounters({ ...window, missKm: 20 });
  const passages = bruteForcePassages({
    ...window,
    volume: { shape: 'ellipsoid', halfSizesKm: [20, 20, 20] },
  });
  expect(passages.length).toBe(encounters.length);
  for (const [index, passage] of passages.entries()) {
    const { tcaMs, missKm, relativeSpeedKmPerS } = encounters[index];
    // Straight and even motion: half the stay is sqrt(R^2 - d^2) / v.
    const halfMs = (Math.sqrt(20 ** 2 - missKm ** 2) / relativeSpeedKmPerS) * 1000;
    expect(Math.abs(passage.entryMs - (tcaMs - halfMs))).toBeLessThan(5);
    expect(Math.abs(passage.exitMs - (tcaMs + halfMs))).toBeLessThan(5);
    expect(Math.abs(passage.closestMs - tcaMs)).toBeLessThan(1);
    expect(passage.closestKm).toBeCloseTo(missKm, 6);
    expect(passage.entryIsEdge || passage.exitIsEdge).toBe(false);
  }
});

test('a stay of milliseconds between two grid points is found', () => {
  const pair = crossingPair(90);
  const window = { first: pair, startMs: START_MS, endMs: START_MS + 0.1 * DAY_MS };
  const [{ missKm, tcaMs }] = bruteForceEncounters({ ...window, missKm: 20 });
  const passages = (radiusKm: number) =>
    bruteForcePassages({
      ...window,
      volume: { shape: 'ellipsoid', halfSizesKm: [radiusKm, radiusKm, radiusKm] },
    }).filter((passage) => Math.abs(passage.closestMs - tcaMs) < 1000);
  expect(passages(missKm + 0.0002).length).toBe(1);
  expect(passages(missKm + 0.0002)[0].exitMs - passages(missKm + 0.0002)[0].entryMs).toBeLessThan(10);
  expect(passages(missKm - 0.0002)).toEqual([]);
});

test('a box is entered and left through the faces that straight motion says', () => {
  const sets = [
    ...crossingPair(90),
    ...syntheticCatalog({ seed: 31, count: 60, epochMs: START_MS, mix: { ...NO_ORBITS, low: 1 } }),
  ];
  const halfSizesKm = [2, 25, 25] as const;
  const window = { first: sets, startMs: START_MS, endMs: START_MS + 0.5 * DAY_MS };
  const passages = bruteForcePassages({ ...window, volume: { shape: 'box', halfSizesKm } });
  const encounters = bruteForceEncounters({ ...window, missKm: 60 });
  let checked = 0;
  for (const { i, j, tcaMs, relativeSpeedKmPerS } of encounters) {
    if (relativeSpeedKmPerS < 3) continue;
    const one = stateAt(sets[i], tcaMs);
    const two = stateAt(sets[j], tcaMs);
    const frame = rtnFrame(one.position, one.velocity);
    const difference = (a: Vector3, b: Vector3): Vector3 => [a[0] - b[0], a[1] - b[1], a[2] - b[2]];
    const d = rotate(frame, difference(two.position, one.position));
    const v = rotate(frame, difference(two.velocity, one.velocity));
    const slabs = halfSizesKm.map((size, axis) => {
      const times = [(-size - d[axis]) / v[axis], (size - d[axis]) / v[axis]];
      return [Math.min(...times), Math.max(...times)];
    });
    const entryS = Math.max(...slabs.map((slab) => slab[0]));
    const exitS = Math.min(...slabs.map((slab) => slab[1]));
    const found = passages.find(
      (passage) => passage.i === i && passage.j === j && Math.abs(passage.closestMs - tcaMs) < 30_000,
    );
    // Straight motion is off by up to a second on thin grazes: only clear cases can be told by it.
    if (exitS - entryS > 1) {
      expect(found).toBeDefined();
      expect(Math.abs((found?.entryMs ?? 0) - tcaMs - entryS * 1000)).toBeLessThan(300);
      expect(Math.abs((found?.exitMs ?? 0) - tcaMs - exitS * 1000)).toBeLessThan(300);
      checked += 1;
    } else if (exitS - entryS < -1) {
      expect(found).toBeUndefined();
    }
  }
  expect(checked).toBeGreaterThan(10);
});

test('a stay that reaches over the edge of the window is cut there and says so', () => {
  const pair = crossingPair(90);
  const [{ tcaMs }] = bruteForceEncounters({
    first: pair,
    startMs: START_MS,
    endMs: START_MS + 0.02 * DAY_MS,
    missKm: 20,
  });
  const volume = { shape: 'ellipsoid', halfSizesKm: [20, 20, 20] } as const;
  const [cutAtEnd] = bruteForcePassages({ first: pair, startMs: tcaMs - 60_000, endMs: tcaMs - 500, volume });
  expect(cutAtEnd).toMatchObject({ exitMs: tcaMs - 500, exitIsEdge: true, entryIsEdge: false });
  const [cutAtStart] = bruteForcePassages({
    first: pair,
    startMs: tcaMs + 500,
    endMs: tcaMs + 60_000,
    volume,
  });
  expect(cutAtStart).toMatchObject({ entryMs: tcaMs + 500, entryIsEdge: true, exitIsEdge: false });
});

const NO_ORBITS = { low: 0, eccentric: 0, medium: 0, geosynchronous: 0, decaying: 0, train: 0 };
