import { mkdtempSync, readdirSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, expect, test } from 'vitest';
import {
  CRAFTED,
  sampleCatalogs,
  sampleSets,
  writeSampleCatalogs,
} from '../../sample-catalogs/make-sample-catalogs.js';
import { twoLineDecoder } from '../../src/elements/two-line.js';
import { bruteForceEncounters } from '../encounters/brute-force.js';
import { stateAt } from './mean-elements.js';

const FOLDER = join(import.meta.dirname, '../../sample-catalogs');
const DAY_MS = 86_400_000;
const START_MS = [Date.UTC(2026, 10, 30), Date.UTC(2026, 11, 1)];
const RELEASE_MS = Date.UTC(2026, 11, 5, 15, 22, 30);
const SETS = sampleSets();

const made = mkdtempSync(join(tmpdir(), 'sample-catalogs-'));
afterAll(() => rmSync(made, { recursive: true }));

function filesBelow(folder: string): string[] {
  return (readdirSync(folder, { recursive: true }) as string[])
    .filter((path) => /\.(tle|csv)$/.test(path))
    .sort();
}

function decoded(path: string, batch = false) {
  const decoder = twoLineDecoder(path, { batch });
  return [...decoder.push(readFileSync(join(FOLDER, path))), ...decoder.end()];
}

test('the files are what the script makes, to the byte', () => {
  writeSampleCatalogs(made);
  expect(filesBelow(FOLDER)).toEqual(filesBelow(made));
  for (const path of filesBelow(made)) {
    expect(readFileSync(join(FOLDER, path)).equals(readFileSync(join(made, path))), path).toBe(true);
  }
});

test('they stay small and the text beside them names each', () => {
  const readme = readFileSync(join(FOLDER, 'README.md'), 'utf8');
  let bytes = 0;
  for (const [path, text] of sampleCatalogs()) {
    bytes += text.length;
    expect(readme).toContain(`\`${path}\``);
  }
  expect(bytes).toBeLessThan(2_000_000);
  for (const { number, missM } of CRAFTED) {
    const row = readme.split('\n').find((line) => line.includes(`(${number})`));
    expect(row).toMatch(new RegExp(`\\| +${missM[1]} +\\|`));
  }
});

test('the reader finds every set as it was made, and the damaged ones', () => {
  for (const [path, catalog, superseded] of [
    ['night-1/catalog.tle', SETS.night1.catalog, []],
    ['catalog.tle', SETS.night2.catalog, SETS.superseded],
  ] as const) {
    const read = decoded(path);
    const damaged = read.flatMap((one) => ('reason' in one ? one.detail : []));
    expect(damaged.length).toBe(6);
    for (const reason of ['checksum', 'line 2', 'inclination', 'characters', 'SGP4', 'line 1 without']) {
      expect(
        damaged.some((detail) => detail.includes(reason)),
        reason,
      ).toBe(true);
    }
    const sets = read.flatMap((one) => ('reason' in one ? [] : one));
    expect(sets.length).toBe(catalog.length + superseded.length);
    const key = (set: { designator: string; meanAnomalyDeg: number }) =>
      `${set.designator} ${set.meanAnomalyDeg}`;
    const byKey = new Map(sets.map((set) => [key(set), set]));
    for (const set of catalog) {
      const { source: _, epochMs, ...elements } = set;
      expect(byKey.get(key(set)), set.designator).toMatchObject(elements);
      expect(Math.abs((byKey.get(key(set))?.epochMs ?? 0) - epochMs)).toBeLessThan(0.01);
    }
  }
  expect(SETS.superseded.length).toBe(5);
});

test('the passes set up on purpose are there on both nights', () => {
  [SETS.night1, SETS.night2].forEach(({ fleet, catalog }, night) => {
    for (const { fleetIndex, number, tca, missM, ageDays } of CRAFTED) {
      const tcaMs = Date.parse(tca);
      const object = catalog.find((set) => set.designator === String(number));
      if (object === undefined) throw new Error(`${number} is missing`);
      const found = bruteForceEncounters({
        first: [fleet[fleetIndex]],
        second: [object],
        startMs: tcaMs - 600_000,
        endMs: tcaMs + 600_000,
        missKm: 10,
      });
      expect(found.length, String(number)).toBe(1);
      expect(Math.abs(found[0].tcaMs - tcaMs), String(number)).toBeLessThan(night === 0 ? 600 : 5);
      // Old elements stay as they are while the fleet's change.
      const allowedM = ageDays !== undefined && night === 0 ? 60 : 6;
      expect(Math.abs(found[0].missKm * 1000 - missM[night]), String(number)).toBeLessThan(allowedM);
    }
  });
});

test('a slow neighbor passes at meters a second', () => {
  const { fleet, catalog } = SETS.night2;
  const cover = catalog.filter((set) => set.designator === '97009');
  const encounters = bruteForceEncounters({
    first: [fleet[7]],
    second: cover,
    startMs: START_MS[1],
    endMs: START_MS[1] + DAY_MS,
    missKm: 5,
  });
  expect(encounters.length).toBeGreaterThan(0);
  for (const { relativeSpeedKmPerS } of encounters) expect(relativeSpeedKmPerS).toBeLessThan(0.02);
});

test('old elements, a decay in the window, docked pairs and own satellites are in the catalog', () => {
  const { fleet, catalog } = SETS.night2;
  const numbered = (designator: string) => {
    const set = catalog.find((one) => one.designator === designator);
    if (set === undefined) throw new Error(`${designator} is missing`);
    return set;
  };
  expect((START_MS[1] - numbered('309021').epochMs) / DAY_MS).toBeGreaterThan(42);
  expect(stateAt(numbered('97061'), START_MS[1] + DAY_MS)).toBeDefined();
  expect(stateAt(numbered('97061'), START_MS[1] + 2 * DAY_MS)).toBeUndefined();
  expect(stateAt(numbered('97051'), START_MS[1])).toEqual(stateAt(numbered('97052'), START_MS[1]));
  for (let hour = 0; hour < 72; hour += 1) {
    const host = stateAt(fleet[6], START_MS[1] + hour * 3_600_000)?.positionKm ?? [0, 0, 0];
    const tender = stateAt(numbered('97053'), START_MS[1] + hour * 3_600_000)?.positionKm ?? [9, 9, 9];
    expect(Math.hypot(...host.map((x, axis) => x - tender[axis]))).toBeLessThan(0.5);
  }
  for (const set of fleet) expect(numbered(set.designator).epochMs).toBeLessThan(set.epochMs);
});

test('each number is borne by one object only', () => {
  for (const { catalog } of [SETS.night1, SETS.night2]) {
    expect(new Set(catalog.map((set) => set.designator)).size).toBe(catalog.length);
    for (const { designator } of catalog) {
      const number = Number(designator);
      expect(number >= 300_000 ? number <= 339_999 : number >= 90_000 && number <= 99_999).toBe(true);
    }
  }
});

test('no set is younger than the start of its night', () => {
  [SETS.night1, SETS.night2].forEach(({ fleet, catalog }, night) => {
    for (const set of [...fleet, ...catalog]) expect(set.epochMs).toBeLessThanOrEqual(START_MS[night] + 1);
  });
});

test('the batch starts together, apart by meters, and catalog objects come within 25 km of it', () => {
  const { batch, night2 } = SETS;
  expect(decoded('batch.tle', true).filter((one) => 'reason' in one)).toEqual([]);
  expect(batch.length).toBe(50);
  const places = batch.map((set) => stateAt(set, RELEASE_MS)?.positionKm ?? [0, 0, 0]);
  for (let i = 0; i < places.length; i += 1) {
    expect(Math.abs(batch[i].epochMs - RELEASE_MS)).toBeLessThan(0.5);
    for (let j = i + 1; j < places.length; j += 1) {
      const km = Math.hypot(...places[i].map((x, axis) => x - places[j][axis]));
      expect(km).toBeGreaterThan(0.005);
      expect(km).toBeLessThan(3);
    }
  }
  const near = night2.catalog.filter(({ designator }) => /^9703[1-6]$/.test(designator));
  const encounters = bruteForceEncounters({
    first: batch,
    second: near,
    startMs: RELEASE_MS,
    endMs: RELEASE_MS + 3 * DAY_MS,
    missKm: 25,
  });
  expect(new Set(encounters.map(({ j }) => j)).size).toBe(6);
});

test('every satellite of the batch has a set for each phase and none between them', () => {
  const rows = readFileSync(join(FOLDER, 'batch-validity.csv'), 'utf8').trim().split('\n').slice(1);
  expect(rows.length).toBe(100);
  SETS.operating.forEach(({ set }, index) => {
    const [released, operating] = [rows[2 * index].split(','), rows[2 * index + 1].split(',')];
    expect(released.slice(0, 3)).toEqual([set.name, 'batch.tle', '2026-12-05T15:22:30.000Z']);
    expect(operating.slice(0, 2)).toEqual([set.name, 'batch-operating.tle']);
    expect(operating[3]).toBe('');
    expect(Date.parse(operating[2]) - Date.parse(released[3])).toBe(30 * 3_600_000);
    expect(Math.abs(Date.parse(operating[2]) - set.epochMs)).toBeLessThan(1);
    const radiusKm = Math.hypot(...(stateAt(set, set.epochMs)?.positionKm ?? [0]));
    expect(Math.abs(radiusKm - 6378 - 556)).toBeLessThan(25);
  });
});
