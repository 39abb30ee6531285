import { expect, test } from 'vitest';
import { bruteForceEncounters } from '../encounters/brute-force.js';
import { syntheticCatalog, walkerShell } from './catalog.js';
import { setPassing } from './passing-orbit.js';

const START_MS = Date.UTC(2026, 11, 1);
const DAY_MS = 86_400_000;

test('crafted objects pass when, how near and how fast they should', () => {
  const [satellite] = walkerShell({
    count: 1,
    planes: 1,
    altitudeKm: 560,
    inclinationDeg: 53,
    epochMs: START_MS - 10_000_000,
  });
  const [template] = syntheticCatalog({ seed: 1, count: 1, epochMs: START_MS - 3_000_000 });
  for (const { missM, crossingDeg, ...orbit } of [
    { missM: 40, crossingDeg: 170 },
    { missM: 700, crossingDeg: 80, semiMajorAxisKm: 7000, climbDeg: 0.4 },
    { missM: 2500, crossingDeg: -35 },
    { missM: 1500, crossingDeg: 100, semiMajorAxisKm: 24_400 },
  ]) {
    const tcaMs = START_MS + 2.37 * DAY_MS;
    const passing = { tcaMs, missM, missAngleDeg: 40, crossingDeg, ...orbit };
    const object = setPassing(satellite, passing, { ...template, bstar: 0.0001 });
    const encounters = bruteForceEncounters({
      first: [satellite],
      second: [object],
      startMs: tcaMs - 600_000,
      endMs: tcaMs + 600_000,
      missKm: 10,
    });
    expect(encounters.length).toBe(1);
    expect(Math.abs(encounters[0].missKm * 1000 - missM)).toBeLessThan(12);
    expect(Math.abs(encounters[0].tcaMs - tcaMs)).toBeLessThan(10);
    if (!('semiMajorAxisKm' in orbit)) {
      // Two circular orbits of one height: 2 v sin(half the angle).
      const speed = 2 * 7.58 * Math.abs(Math.sin((crossingDeg * Math.PI) / 360));
      expect(Math.abs(encounters[0].relativeSpeedKmPerS - speed)).toBeLessThan(0.05);
    }
  }
});
