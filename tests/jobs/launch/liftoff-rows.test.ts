import { describe, expect, it } from 'vitest';
import {
  createEncounterRecords,
  type EncounterRecords,
  extendRecords,
  FIELD,
} from '../../../src/jobs/encounter-records.js';
import { liftoffLines } from '../../../src/jobs/launch/liftoff-lines.js';
import { liftoffRows, withBestRank } from '../../../src/jobs/launch/liftoff-rows.js';
import type { LiftoffSearch } from '../../../src/jobs/launch/liftoff-search.js';

const LIFTOFF_MS = Date.UTC(2026, 11, 5, 14, 20);
const MINUTE_MS = 60_000;

type Met = readonly [liftoff: number, missKm: number, probability: number];

/** Two liftoffs and more of one object, against two others. */
function searchOf(slipsMin: readonly number[], along: readonly number[] = []): LiftoffSearch {
  const copies = slipsMin.map(() => ({ designator: 'B-A', name: 'A' }));
  const others = [
    { designator: '97001', name: 'INVENTED 1' },
    { designator: '97002', name: '' },
  ];
  return {
    slipsMs: slipsMin.map((minutes) => minutes * MINUTE_MS),
    phaseCount: 1,
    objects: [...copies, ...others],
    flying: along.map((first) => ({ first, second: copies.length + 1, farthestKm: 3 })),
  } as unknown as LiftoffSearch;
}

function recordsOf(search: LiftoffSearch, met: readonly Met[]): EncounterRecords {
  const records = createEncounterRecords();
  for (const [k, [liftoff, missKm, probability]] of met.entries()) {
    const at = extendRecords(records, 1);
    records.data[at + FIELD.first] = liftoff;
    records.data[at + FIELD.second] = search.slipsMs.length;
    records.data[at + FIELD.tcaMs] = LIFTOFF_MS + k * MINUTE_MS;
    records.data[at + FIELD.missKm] = missKm;
    records.data[at + FIELD.probability] = probability;
  }
  return records;
}

function rowsOf(
  slipsMin: readonly number[],
  met: readonly Met[],
  limits: { clearKm?: number; alertPc?: number },
  along: readonly number[] = [],
) {
  const search = searchOf(slipsMin, along);
  return withBestRank(
    liftoffRows(search, recordsOf(search, met), LIFTOFF_MS, {
      clearKm: limits.clearKm,
      alertPc: limits.alertPc,
    }),
  );
}

const MET: readonly Met[] = [
  [0, 4, 1e-8],
  [0, 9, 2e-5],
  [1, 12, 1e-9],
  [1, 6, 1e-7],
  [2, 20, Number.NaN],
];
const verdicts = (limits: { clearKm?: number; alertPc?: number }, along: readonly number[] = []) =>
  rowsOf([-1, 0, 1, 2], MET, limits, along).map(({ isClear, whyNot, violations }) => [
    isClear,
    violations,
    whyNot,
  ]);

describe('a liftoff', () => {
  it('is clear without limits only where nothing is met', () => {
    expect(verdicts({})).toEqual([
      [false, 2, '2 encounters'],
      [false, 2, '2 encounters'],
      [false, 1, '1 encounter'],
      [true, 0, ''],
    ]);
  });

  it('is clear by distance where nothing is closer', () => {
    expect(verdicts({ clearKm: 5 })).toEqual([
      [false, 1, '1 closer than 5 km'],
      [true, 0, ''],
      [true, 0, ''],
      [true, 0, ''],
    ]);
    expect(verdicts({ clearKm: 4 })[0]).toEqual([true, 0, '']);
  });

  it('is clear by probability where none reaches it and none is missing', () => {
    expect(verdicts({ alertPc: 1e-7 })).toEqual([
      [false, 1, '1 with a probability of 1E-7 or more'],
      [false, 1, '1 with a probability of 1E-7 or more'],
      [false, 1, '1 without a probability'],
      [true, 0, ''],
    ]);
  });

  it('must keep both limits where both are given', () => {
    expect(verdicts({ clearKm: 10, alertPc: 1e-5 }).slice(0, 2)).toEqual([
      [false, 2, '2 closer than 10 km; 1 with a probability of 1E-5 or more'],
      [false, 1, '1 closer than 10 km'],
    ]);
  });

  it('is never clear with something flying along', () => {
    expect(verdicts({ clearKm: 1 }, [1, 3])).toEqual([
      [true, 0, ''],
      [false, 1, '1 object flying along (97002 beside B-A)'],
      [true, 0, ''],
      [false, 1, '1 object flying along (97002 beside B-A)'],
    ]);
  });
});

describe('the place of a liftoff', () => {
  const places = (slipsMin: readonly number[], met: readonly Met[], limits = { clearKm: 5 }) =>
    rowsOf(slipsMin, met, limits).map(({ bestRank }) => bestRank);

  it('goes by clear, violations, probability, distance, slip, time', () => {
    expect(places([0, 1], [[0, 4, 0]])).toEqual([2, 1]);
    expect(
      places(
        [0, 1],
        [
          [0, 4, 0],
          [0, 4, 0],
          [1, 4, 1e-3],
        ],
      ),
    ).toEqual([2, 1]);
    expect(
      places(
        [0, 1],
        [
          [0, 20, 1e-6],
          [1, 6, 1e-7],
        ],
      ),
    ).toEqual([2, 1]);
    expect(
      places(
        [0, 1],
        [
          [0, 6, 1e-7],
          [1, 20, 1e-7],
        ],
      ),
    ).toEqual([2, 1]);
    expect(places([-2, -1, 0, 1], [])).toEqual([4, 2, 1, 3]);
  });
});

describe('the lines for the launch conductor', () => {
  it('tell stretches of one verdict, the best liftoff and the nominal one', () => {
    const rows = rowsOf(
      [-2, -1, 0, 1, 2],
      [
        [0, 4, 1e-8],
        [1, 2.5, 1e-6],
        [2, 12, 1e-9],
        [4, 3, 1e-7],
      ],
      { clearKm: 5 },
    );
    expect(liftoffLines(rows, { clearKm: 5, alertPc: undefined })).toEqual([
      '2 of 5 liftoffs are clear. Clear: no encounter closer than 5 km, nothing flying along.',
      '',
      'Slip min      2026-12-05            Clear  Breach  Closest km  Highest Pc  Why not: worst object',
      '-2 to -1      14:18:00 to 14:19:00  NO          1        2.50     1.0E-06  close: 97001',
      '0 to +1       14:20:00 to 14:21:00  yes         0        12.0     1.0E-09',
      '+2            14:22:00              NO          1        3.00     1.0E-07  close: 97001',
      'Breach: encounters that break a limit. All figures: the worst of the liftoffs on the line.',
      '',
      'Best: 2026-12-05T14:21:00Z (slip +1 min), no encounter at all.',
      'Nominal: 2026-12-05T14:20:00Z is clear; place 2 of 5.',
    ]);
  });

  it('tell of a single liftoff in two sentences', () => {
    const rows = rowsOf([0], [[0, 4, 1e-8]], { clearKm: 5, alertPc: 1e-4 });
    expect(liftoffLines(rows, { clearKm: 5, alertPc: 1e-4 })).toEqual([
      'Liftoff 2026-12-05T14:20:00Z: NOT CLEAR: 1 closer than 5 km.',
      'Closest 4.00 km (97001 INVENTED 1, B-A), highest probability 1.0E-08.',
      'Clear: no encounter closer than 5 km, none with a probability of 1.0E-04 or more, nothing flying',
      'along.',
    ]);
  });

  it('name the day where a range passes midnight', () => {
    const rows = rowsOf(
      [0, 600],
      [
        [0, 4, 1e-8],
        [1, 4, Number.NaN],
      ],
      { alertPc: 1e-9 },
    );
    const lines = liftoffLines(rows, { clearKm: undefined, alertPc: 1e-9 });
    expect(lines[3]).toMatch(
      /^0 to \+600 +12-05 14:20:00 to 12-06 00:20:00 +NO +1 +4\.00 +1\.0E-08 +probable, no…$/,
    );
  });
});
