import { Writable } from 'node:stream';
import { describe, expect, test } from 'vitest';
import { CAUTION } from '../../src/caution.js';
import {
  changeLines,
  compareWithPast,
  type KnownEncounter,
  type PastRun,
  type SeenEncounter,
} from '../../src/jobs/changes.js';
import { CHANGES_COLUMNS, writeChangesCsv } from '../../src/tables/changes-csv.js';

const DAY_MS = 86_400_000;
const MINUTE_MS = 60_000;
const TONIGHT_MS = Date.UTC(2026, 11, 2);
const LAST_NIGHT_MS = TONIGHT_MS - DAY_MS;
const TCA_MS = TONIGHT_MS + DAY_MS;

function seen(change: Partial<SeenEncounter> = {}): SeenEncounter {
  return {
    object1Designator: '900001',
    object1Name: 'HERON 1',
    object2Designator: '900777',
    object2Name: 'BRIG DEB',
    tcaMs: TCA_MS,
    missDistanceM: 400,
    collisionProbability: 1e-6,
    shorterPeriodS: 6000,
    ...change,
  };
}

const known = (change: Partial<KnownEncounter> = {}): KnownEncounter => ({
  ...seen(),
  firstSeenMs: LAST_NIGHT_MS,
  runsSeen: 1,
  ...change,
});
const run = (...encounters: KnownEncounter[]): PastRun => ({
  name: 'run-1',
  startMs: LAST_NIGHT_MS,
  encounters,
});
const coverage = { startMs: TONIGHT_MS, endMs: TONIGHT_MS + 7 * DAY_MS, isScreened: () => true };
const compare = (tonight: SeenEncounter[], past: PastRun[], isScreened = () => true) =>
  compareWithPast(tonight, past, { ...coverage, isScreened });
const kinds = (tonight: SeenEncounter[], past: PastRun[]) =>
  compare(tonight, past).changes.map(({ kind }) => kind);

describe('the change of an encounter that is listed again', () => {
  test.each([
    ['rose', { collisionProbability: 2e-6 }],
    ['steady', { collisionProbability: 1.99e-6 }],
    ['steady', { collisionProbability: 0.51e-6 }],
    ['fell', { collisionProbability: 0.5e-6 }],
    ['fell', { collisionProbability: 0 }],
    ['steady', { collisionProbability: undefined, missDistanceM: 210 }],
    ['rose', { collisionProbability: undefined, missDistanceM: 200 }],
    ['fell', { collisionProbability: undefined, missDistanceM: 800 }],
    ['rose', { collisionProbability: undefined, missDistanceM: 0 }],
  ] as const)('is %s with %j after 1e-6 at 400 m', (kind, change) => {
    expect(kinds([seen(change)], [run(known())])).toEqual([kind]);
  });

  test('counts probabilities below 1e-10 as equal', () => {
    expect(
      kinds([seen({ collisionProbability: 9e-11 })], [run(known({ collisionProbability: 1e-30 }))]),
    ).toEqual(['steady']);
    expect(kinds([seen({ collisionProbability: 3e-10 })], [run(known({ collisionProbability: 0 }))])).toEqual(
      ['rose'],
    );
  });

  test('carries its past on', () => {
    const [change] = compare(
      [seen({ tcaMs: TCA_MS + 5 })],
      [run(known({ firstSeenMs: 17, runsSeen: 4 }))],
    ).changes;
    expect(change).toMatchObject({
      current: { tcaMs: TCA_MS + 5 },
      previous: { tcaMs: TCA_MS, missDistanceM: 400, collisionProbability: 1e-6 },
      firstSeenMs: 17,
      runsSeen: 5,
    });
    expect(compare([seen()], [run(known({ firstSeenMs: 17, runsSeen: 4 }))]).known).toEqual([
      { ...seen(), firstSeenMs: 17, runsSeen: 5 },
    ]);
  });
});

describe('the same encounter', () => {
  test('is of the same pair, whichever object comes first', () => {
    const turned = known({
      object1Designator: '900777',
      object1Name: 'BRIG DEB',
      object2Designator: '900001',
      object2Name: 'HERON 1',
    });
    expect(kinds([seen()], [run(turned)])).toEqual(['steady']);
    expect(kinds([seen()], [run(known({ object2Designator: '900778' }))])).toEqual(['new', 'gone']);
  });

  test('differs by at most a quarter of the shorter period', () => {
    // A quarter of 6000 s is 1500 s, or 25 minutes.
    expect(kinds([seen({ tcaMs: TCA_MS + 25 * MINUTE_MS })], [run(known())])).toEqual(['steady']);
    expect(kinds([seen({ tcaMs: TCA_MS + 25 * MINUTE_MS + 1 })], [run(known())])).toEqual(['new', 'gone']);
    expect(kinds([seen({ tcaMs: TCA_MS + 25 * MINUTE_MS, shorterPeriodS: 5999 })], [run(known())])).toEqual([
      'new',
      'gone',
    ]);
  });

  test('has one counterpart at most, the nearest in time first', () => {
    const tonight = [seen({ tcaMs: TCA_MS }), seen({ tcaMs: TCA_MS + 10 * MINUTE_MS })];
    const before = [
      known({ tcaMs: TCA_MS + 9 * MINUTE_MS, runsSeen: 7 }),
      known({ tcaMs: TCA_MS + 24 * MINUTE_MS, runsSeen: 3 }),
    ];
    const inTwoOrders = [
      compare(tonight, [run(...before)]),
      compare([...tonight].reverse(), [run(...[...before].reverse())]),
    ];
    for (const { changes } of inTwoOrders) {
      const runsSeen = new Map(changes.map((change) => [change.current?.tcaMs, change.runsSeen]));
      expect(runsSeen).toEqual(
        new Map([
          [TCA_MS, 4],
          [TCA_MS + 10 * MINUTE_MS, 8],
        ]),
      );
    }
    expect(kinds(tonight, [run(before[0])])).toEqual(['new', 'steady']);
  });

  test('is found in an older run when the latest does not list it', () => {
    const older: PastRun = {
      name: 'run-0',
      startMs: LAST_NIGHT_MS - DAY_MS,
      encounters: [known({ runsSeen: 2, firstSeenMs: 5 })],
    };
    const { changes } = compare([seen()], [run(), older]);
    expect(changes).toMatchObject([{ kind: 'steady', runsSeen: 3, firstSeenMs: 5 }]);
  });
});

describe('an encounter that is not listed any more', () => {
  test.each([
    ['past', { tcaMs: TONIGHT_MS - 1 }, true],
    ['gone', { tcaMs: TONIGHT_MS }, true],
    ['gone', { tcaMs: TONIGHT_MS + 7 * DAY_MS }, true],
    ['outside-window', { tcaMs: TONIGHT_MS + 7 * DAY_MS + 1 }, true],
    ['not-screened', {}, false],
    ['past', { tcaMs: TONIGHT_MS - 1 }, false],
  ] as const)('is %s with %j', (kind, change, screened) => {
    const { changes, known: kept } = compare([], [run(known({ ...change, runsSeen: 3 }))], () => screened);
    expect(changes).toMatchObject([{ kind, current: undefined, runsSeen: 3 }]);
    expect(kept).toEqual([]);
  });

  test('is told once: only against the latest run', () => {
    expect(kinds([], [run(), { ...run(known()), name: 'run-0' }])).toEqual([]);
  });
});

test('without earlier runs everything is new since this run', () => {
  expect(compare([seen()], []).changes).toMatchObject([
    { kind: 'new', previous: undefined, firstSeenMs: TONIGHT_MS, runsSeen: 1 },
  ]);
});

test('the order is by kind, then probability, whatever order the encounters came in', () => {
  const pair = (n: number, collisionProbability: number | undefined) =>
    seen({ object2Designator: String(n), collisionProbability });
  const before = [
    known({ object2Designator: '1' }),
    known({ object2Designator: '2' }),
    known({ object2Designator: '6' }),
  ];
  const tonight = [pair(1, 3e-6), pair(2, 5e-6), pair(3, 1e-3), pair(4, undefined), pair(5, 1e-9)];
  const order = (list: SeenEncounter[]) =>
    compare(list, [run(...before)]).changes.map((change) => `${change.kind} ${change.object2.designator}`);
  expect(order(tonight)).toEqual(['rose 2', 'rose 1', 'new 3', 'new 5', 'new 4', 'gone 6']);
  expect(order([...tonight].reverse())).toEqual(order(tonight));
});

test('the summary tells the risen passes first, then the numbers', () => {
  const before = [known(), known({ object2Designator: '2' }), known({ object2Designator: '3' })];
  const tonight = [
    seen({ collisionProbability: 1e-4, missDistanceM: 99.6, object1Name: 'HERON\u001b[2J' }),
    seen({ object2Designator: '2', collisionProbability: 1e-5 }),
    seen({ object2Designator: '9' }),
  ];
  const { changes } = compare(tonight, [run(...before)]);
  expect(changeLines(changes, 1, 'run-1')).toEqual([
    'Rose: 900001 HERON?[2J / 900777 BRIG DEB, TCA 2026-12-03T00:00:00Z, probability 1.0E-06 -> 1.0E-04, miss 400 -> 100 m',
    'and 1 more that rose: see changes.csv',
    'Since run run-1: 2 rose, 1 new, 1 gone.',
  ]);
  expect(changeLines([], 5, 'run-1')).toEqual(['Since run run-1: nothing then, nothing now.']);
  expect(changeLines(changes, 5, undefined)).toEqual([
    'No earlier run to compare with: every encounter counts as new.',
  ]);
});

test('changes.csv has the columns in their order, empty cells where there is no figure, and the caution', async () => {
  const chunks: string[] = [];
  const sink = new Writable({
    write: (chunk, _encoding, done) => {
      chunks.push(String(chunk));
      done();
    },
  });
  const { changes } = compare(
    [seen({ object2Designator: '9', object2Name: '=1+1' })],
    [run(known({ collisionProbability: undefined }))],
  );
  await writeChangesCsv(sink, changes);
  expect(chunks.join('').split('\r\n')).toEqual([
    'change,object1_designator,object1_name,object2_designator,object2_name,tca_utc,previous_tca_utc,' +
      'miss_distance_m,previous_miss_distance_m,collision_probability,previous_collision_probability,' +
      'first_seen_utc,runs_seen,caution',
    `new,900001,HERON 1,9,'=1+1,2026-12-03T00:00:00.000Z,,400.000,,1.00000E-06,,2026-12-02T00:00:00.000Z,1,${CAUTION}`,
    `gone,900001,HERON 1,900777,BRIG DEB,,2026-12-03T00:00:00.000Z,,400.000,,,2026-12-01T00:00:00.000Z,1,${CAUTION}`,
    '',
  ]);
  expect(CHANGES_COLUMNS.every(({ meaning }) => meaning.length > 10)).toBe(true);
});
