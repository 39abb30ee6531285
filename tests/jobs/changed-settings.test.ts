import { describe, expect, test } from 'vitest';
import {
  changedSettings,
  changedSettingsLines,
  changedSettingsTexts,
  type RunSettings,
  settingsOf,
} from '../../src/jobs/changed-settings.js';
import { recordedOptions } from '../../src/jobs/run-record.js';
import type { ScreenOptions } from '../../src/jobs/screen-options.js';

const OPTIONS: ScreenOptions = {
  fleetPaths: ['fleet-1130.tle'],
  catalogPaths: ['catalog-1130.tle'],
  allOnAll: false,
  withinFleet: false,
  startMs: Date.UTC(2026, 10, 30),
  days: 7,
  volume: { shape: 'SPHERE', missKm: 5 },
  objectsPath: 'objects.csv',
  sigmaPath: undefined,
  maxAgeDays: 30,
  workers: 2,
  outPath: 'tonight',
  historyPath: 'runs',
  keepRuns: undefined,
  alertPc: undefined,
  cdmFromPc: undefined,
  top: 15,
};
const OBJECTS = { file: 'objects.csv', sha256: 'aa' };

/** As read back from a run.json. */
function settings(
  change: Partial<ScreenOptions> = {},
  others: readonly { readonly file: string; readonly sha256: string }[] = [OBJECTS],
  version = '0.1.0',
): RunSettings {
  const record = { version, options: recordedOptions({ ...OPTIONS, ...change }), inputs: { others } };
  return settingsOf(JSON.parse(JSON.stringify(record))) as RunSettings;
}

const texts = (now: RunSettings, before = settings()) => changedSettingsTexts(changedSettings(before, now));

describe('the settings of two runs', () => {
  test.each<[string[], RunSettings]>([
    [['--miss-km: 5 then, 10 now'], settings({ volume: { shape: 'SPHERE', missKm: 10 } })],
    [
      [
        '--miss-km: 5 then, none now',
        '--volume-rtn-km: none then, 2,25,25 now',
        '--volume-shape: none then, BOX now',
      ],
      settings({ volume: { shape: 'BOX', halfSizeRtnKm: [2, 25, 25] } }),
    ],
    [['--days: 7 then, 3 now'], settings({ days: 3 })],
    [['--within-fleet: off then, on now'], settings({ withinFleet: true })],
    [
      ['--fleet: 1 file then, 0 files now', '--all-on-all: off then, on now'],
      settings({ allOnAll: true, fleetPaths: [] }),
    ],
    [['--catalog: 1 file then, 2 files now'], settings({ catalogPaths: ['a.tle', 'b.tle'] })],
    [
      ['--sigma: the built-in table then, sigma.csv now'],
      settings({ sigmaPath: 'sigma.csv' }, [OBJECTS, { file: 'sigma.csv', sha256: 'bb' }]),
    ],
    [['--objects: objects.csv then, none now'], settings({ objectsPath: undefined }, [])],
    [
      ['--objects: objects.csv then and now, but its contents changed'],
      settings({}, [{ file: 'objects.csv', sha256: 'cc' }]),
    ],
    [
      ['--objects: objects.csv then, other.csv now'],
      settings({ objectsPath: 'other.csv' }, [{ file: 'other.csv', sha256: 'cc' }]),
    ],
    [['version of wideberth: 0.1.0 then, 0.2.0 now'], settings({}, [OBJECTS], '0.2.0')],
  ])('differ: %j', (expected, now) => {
    expect(texts(now)).toEqual(expected);
  });

  test('are the same where only what every night changes, or what touches no encounter, differs', () => {
    const now = settings(
      {
        fleetPaths: ['fleet-1201.tle'],
        catalogPaths: ['catalog-1201.tle'],
        startMs: Date.UTC(2026, 11, 1),
        objectsPath: 'moved/objects.csv',
        maxAgeDays: 20,
        outPath: 'elsewhere',
        historyPath: 'other-runs',
        keepRuns: 3,
        alertPc: 1e-4,
        cdmFromPc: 0,
        top: 3,
      },
      [{ file: 'moved/objects.csv', sha256: 'aa' }],
    );
    expect(texts(now)).toEqual([]);
    expect(changedSettingsLines([])).toEqual([]);
  });

  test('both go into the record, files with their hash', () => {
    const now = settings({ sigmaPath: 'sigma.csv' }, [OBJECTS, { file: 'sigma.csv', sha256: 'bb' }]);
    expect(changedSettings(settings(), now)).toEqual([
      { setting: 'sigma', previous: null, current: { file: 'sigma.csv', sha256: 'bb' } },
    ]);
  });
});

test('names of files cannot disturb the terminal', () => {
  expect(
    texts(settings({ objectsPath: '\u001b[2J.csv' }, [{ file: '\u001b[2J.csv', sha256: 'cc' }])),
  ).toEqual(['--objects: objects.csv then, ?[2J.csv now']);
});

test.each([
  undefined,
  null,
  'run',
  {},
  { version: '0.1.0', options: null, inputs: { others: [] } },
  { version: '0.1.0', options: {}, inputs: null },
])('%j is no record with settings', (record) => {
  expect(settingsOf(record)).toBeUndefined();
});

test('the summary says where the settings of the other run are not known', () => {
  expect(changedSettingsLines(undefined)).toEqual([
    'The settings of that run are not known: changes may come from other settings alone.',
  ]);
});
