import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { expect, test } from 'vitest';
import { CAUTION } from '../../src/caution.js';
import { filesOfRun } from '../../src/jobs/run-folder.js';
import {
  elementAgesOf,
  environmentOf,
  type RunRecord,
  recordedOptions,
  runRecordText,
} from '../../src/jobs/run-record.js';
import type { ScreenOptions } from '../../src/jobs/screen-options.js';

const OPTIONS: ScreenOptions = {
  fleetPaths: ['fleet.tle'],
  catalogPaths: ['catalog.tle'],
  allOnAll: false,
  withinFleet: true,
  startMs: Date.UTC(2026, 11, 1),
  days: 7,
  volume: { shape: 'SPHERE', missKm: 5 },
  objectsPath: undefined,
  sigmaPath: undefined,
  maxAgeDays: 30,
  workers: 2,
  outPath: 'tonight',
  historyPath: undefined,
  keepRuns: undefined,
  alertPc: 1e-4,
  cdmFromPc: undefined,
  top: 15,
};

const RECORD: Omit<RunRecord, 'environment'> = {
  command: 'screen',
  options: recordedOptions(OPTIONS),
  window: { startUtc: '2026-12-01T00:00:00.000Z', endUtc: '2026-12-08T00:00:00.000Z', days: 7 },
  inputs: {
    elements: [{ file: 'fleet.tle', sha256: 'ab', read: 3, used: 1, superseded: 1, rejected: 1 }],
    others: [],
  },
  elementAges: { fleet: elementAgesOf([]), catalog: elementAgesOf([{ designator: '900001', ageDays: 1 }]) },
  search: { gridStepS: 10 },
  sigmaSource: 'built-in',
  counts: { encounters: 0 },
  alert: { highestProbability: null, reached: false },
  comparedWith: null,
  settingsChanged: null,
};
const FILES = [{ name: 'conjunctions.csv', bytes: 5, sha256: 'cd' }];

test('the record makes a folder a run', () => {
  const folder = mkdtempSync(join(tmpdir(), 'wideberth-record-'));
  const environment = environmentOf(0, 1000, { search: 0.5 }, 2);
  writeFileSync(join(folder, 'run.json'), runRecordText('1.2.3', { ...RECORD, environment }, FILES));
  expect(filesOfRun(folder)).toEqual(new Set(['run.json', 'conjunctions.csv']));
  rmSync(folder, { recursive: true });
});

test('everything that varies stands in environment', () => {
  const at = (ms: number, workers: number) => {
    const options = recordedOptions({ ...OPTIONS, workers });
    const record = { ...RECORD, options, environment: environmentOf(ms, ms + 1000, { search: ms }, workers) };
    return JSON.parse(runRecordText('1.2.3', record, FILES));
  };
  const [a, b] = [at(0, 1), at(5000, 8)];
  expect(a).not.toEqual(b);
  expect({ ...a, environment: undefined }).toEqual({ ...b, environment: undefined });
  expect(a).toMatchObject({ program: 'wideberth', version: '1.2.3', caution: CAUTION, files: FILES });
  expect(a.environment.peakMemoryMB).toBeGreaterThan(10);
  expect(a.environment.startedUtc).toBe('1970-01-01T00:00:00.000Z');
});

test('options are told as on the command line', () => {
  expect(RECORD.options).toMatchObject({
    fleet: ['fleet.tle'],
    start: '2026-12-01T00:00:00.000Z',
    'miss-km': 5,
    'alert-pc': 1e-4,
  });
  const volume = { shape: 'BOX', halfSizeRtnKm: [1, 2, 3] } as const;
  const options = recordedOptions({ ...OPTIONS, volume });
  expect(options).toMatchObject({ 'volume-rtn-km': [1, 2, 3], 'volume-shape': 'BOX' });
  expect(options).not.toHaveProperty('miss-km');
});

test('ages are told by median and worst', () => {
  const ages = [3, 1, 10, 2].map((ageDays, i) => ({ designator: `90000${i}`, ageDays }));
  expect(elementAgesOf(ages)).toEqual({
    objects: 4,
    medianDays: 2.5,
    worstDays: 10,
    worstDesignator: '900002',
  });
  expect(elementAgesOf(ages.slice(1))).toMatchObject({ medianDays: 2 });
  expect(elementAgesOf([])).toEqual({ objects: 0, medianDays: null, worstDays: null, worstDesignator: null });
});
