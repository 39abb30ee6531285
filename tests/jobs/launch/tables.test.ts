import { describe, expect, it } from 'vitest';
import { InputError } from '../../../src/input-error.js';
import { batchPhases, gapLine } from '../../../src/jobs/launch/phases.js';
import { readReleaseTimes } from '../../../src/jobs/launch/release-times.js';
import { readValidity } from '../../../src/jobs/launch/validity.js';
import { batchSet, RELEASE_MS } from './batch-sets.js';

const HOUR_MS = 3_600_000;
const sets = [batchSet('B-SAT-1', { name: 'SAT 1' }, 1), batchSet('B-SAT-2', { name: 'SAT 2' }, 4)];

describe('release times', () => {
  const read = (...rows: string[]) =>
    readReleaseTimes(['object,release_utc', ...rows, ''].join('\n'), 'r.csv', sets, RELEASE_MS - HOUR_MS);

  it('are read by name or designator', () => {
    expect(read('SAT 1,2026-12-05T15:22:30Z', 'B-SAT-2,2026-12-05T15:23:30.5Z')).toEqual(
      new Map([
        ['B-SAT-1', RELEASE_MS],
        ['B-SAT-2', RELEASE_MS + 60_500],
      ]),
    );
  });

  it.each([
    [['SAT 1,2026-12-05T15:22:30Z'], 'r.csv: no release_utc for B-SAT-2: add a row for each'],
    [
      ['SAT 1,2026-12-05T15:22:30Z', 'sat-1,2026-12-05T15:22:30Z'],
      'r.csv:3: B-SAT-1 is already on line 2: leave one row an object',
    ],
    [
      ['SAT 9,2026-12-05T15:22:30Z'],
      'r.csv:2: "SAT 9" is neither name nor designator of a set of the batch: check the spelling',
    ],
    [['SAT 1,soon'], 'r.csv:2: release_utc is "soon", expected a UTC time such as 2026-12-05T15:22:30Z'],
    [
      ['SAT 1,2026-12-05T14:22:29Z'],
      'r.csv:2: release_utc is 2026-12-05T14:22:29.000Z, before liftoff at 2026-12-05T14:22:30.000Z',
    ],
    [['SAT 1'], 'r.csv:2: 1 cells, expected 2 as in the header'],
  ])('refuses %j', (rows, message) => {
    expect(() => read(...rows)).toThrow(new InputError(message));
  });
});

const high = [
  batchSet('B-SAT-1', { name: 'SAT 1', source: { file: 'high.tle', line: 1, text: '' } }),
  batchSet('B-SAT-2', { name: 'SAT 2', source: { file: 'high.tle', line: 4, text: '' } }),
];
const both = [...sets, ...high];
const readRows = (...rows: string[]) =>
  readValidity(
    ['name,file,valid_from,valid_until', ...rows, ''].join('\n'),
    'v.csv',
    ['batch.tle', 'high.tle'],
    both,
  );

const LOW_1 = 'SAT 1,batch.tle,2026-12-05T15:22:30Z,2026-12-06T00:00:00Z';
const LOW_2 = 'SAT 2,batch.tle,2026-12-05T15:22:30Z,2026-12-06T00:00:00Z';
const HIGH_1 = 'SAT 1,high.tle,2026-12-07T00:00:00Z,';
const HIGH_2 = 'SAT 2,high.tle,2026-12-06T00:00:00Z,';

describe('validities', () => {
  it('are read for each set', () => {
    expect(
      readRows(LOW_1, HIGH_1, LOW_2, HIGH_2).map(({ batchSet: of, line }) => [both.indexOf(of), line]),
    ).toEqual([
      [0, 2],
      [2, 3],
      [1, 4],
      [3, 5],
    ]);
  });

  it('find files from the folder of the table', () => {
    const rows = readValidity(
      'name,file,valid_from,valid_until\nSAT 1,batch.tle,2026-12-05,\n',
      'some/where/v.csv',
      ['./some/where/batch.tle'],
      [batchSet('B-SAT-1', { name: 'SAT 1', source: { file: './some/where/batch.tle', line: 1, text: '' } })],
    );
    expect(rows).toHaveLength(1);
  });

  it.each([
    [
      [LOW_1, HIGH_1, LOW_2],
      'v.csv: no row for the set of B-SAT-2 at high.tle:4: say from when to when it holds',
    ],
    [
      [LOW_1, LOW_1.replace('SAT', 'sat')],
      'v.csv:3: the set of B-SAT-1 in batch.tle is already on line 2: leave one row a set',
    ],
    [
      [LOW_1.replace('batch.tle', 'other.tle')],
      'v.csv:2: file is "other.tle", which no --batch names (batch.tle, high.tle)',
    ],
    [
      [LOW_1.replace('12-06T00', '12-05T15')],
      'v.csv:2: valid_until is 2026-12-05T15:00:00.000Z, not after valid_from, 2026-12-05T15:22:30.000Z',
    ],
    [
      [LOW_1, HIGH_1.replace('2026-12-07', '2026-12-05'), LOW_2, HIGH_2],
      'v.csv:2: valid_from is 2026-12-05T15:22:30.000Z, but the set of B-SAT-1 on line 3 has no valid_until: only one set can hold at a time',
    ],
    [
      [LOW_1, LOW_2, HIGH_1, HIGH_2.replace('12-06T00:00:00', '12-05T23:59:59')],
      'v.csv:5: valid_from is 2026-12-05T23:59:59.000Z, but the set of B-SAT-2 on line 3 holds until 2026-12-06T00:00:00.000Z: only one set can hold at a time',
    ],
    [['SAT 1,batch.tle,,'], 'v.csv:2: valid_from is "", expected a UTC time such as 2026-12-05T15:22:30Z'],
  ])('refuses %j', (rows, message) => {
    expect(() => readRows(...rows)).toThrow(new InputError(message));
  });
});

describe('phases', () => {
  const release = () => RELEASE_MS;

  it('are one set from release on without validities', () => {
    const { phases, gaps, startMs, endMs } = batchPhases(
      sets,
      (designator) => RELEASE_MS + (designator === 'B-SAT-1' ? 60_000 : 0),
      undefined,
      undefined,
      2,
    );
    expect(
      phases.map(({ designator, validFromMs, validToMs }) => [
        designator,
        validFromMs - RELEASE_MS,
        validToMs,
      ]),
    ).toEqual([
      ['B-SAT-1', 60_000, Number.POSITIVE_INFINITY],
      ['B-SAT-2', 0, Number.POSITIVE_INFINITY],
    ]);
    expect(gaps).toEqual([]);
    expect([startMs, endMs - startMs]).toEqual([RELEASE_MS, 48 * HOUR_MS]);
  });

  it('need validities where an object has two sets', () => {
    expect(() => batchPhases(both, release, undefined, undefined, 2)).toThrow(
      new InputError(
        'B-SAT-1 has 2 sets (batch.tle:1, high.tle:1): say with --batch-validity which holds when, or name the objects apart',
      ),
    );
  });

  it('follow one another, and tell their gaps, within the window', () => {
    const rows = readRows(LOW_1, HIGH_1, LOW_2, HIGH_2);
    const { phases, gaps } = batchPhases(both, release, rows, 'v.csv', 3);
    expect(
      phases.map(({ designator, set, validFromMs, validToMs }) => [
        designator,
        set.source.file,
        validFromMs,
        validToMs,
      ]),
    ).toEqual([
      ['B-SAT-1', 'batch.tle', RELEASE_MS, Date.UTC(2026, 11, 6)],
      ['B-SAT-1', 'high.tle', Date.UTC(2026, 11, 7), Number.POSITIVE_INFINITY],
      ['B-SAT-2', 'batch.tle', RELEASE_MS, Date.UTC(2026, 11, 6)],
      ['B-SAT-2', 'high.tle', Date.UTC(2026, 11, 6), Number.POSITIVE_INFINITY],
    ]);
    expect(gaps).toEqual([
      { designator: 'B-SAT-1', fromMs: Date.UTC(2026, 11, 6), toMs: Date.UTC(2026, 11, 7), line: 3 },
    ]);
    expect(gapLine(gaps, 'v.csv')).toBe(
      'v.csv:3: no set of B-SAT-1 holds from 2026-12-06T00:00:00.000Z to 2026-12-07T00:00:00.000Z (24.0 h): not screened then',
    );
  });

  it('tell a gap after release, and one at the end', () => {
    const rows = readRows(LOW_1.replace('15:22:30', '16:22:30'), HIGH_1, LOW_2, HIGH_2);
    const { phases, gaps, endMs } = batchPhases(both, release, rows, 'v.csv', 1);
    // The second set begins after the window.
    expect(phases.filter(({ designator }) => designator === 'B-SAT-1')).toHaveLength(1);
    expect(gaps).toEqual([
      { designator: 'B-SAT-1', fromMs: RELEASE_MS, toMs: RELEASE_MS + HOUR_MS, line: 2 },
      { designator: 'B-SAT-1', fromMs: Date.UTC(2026, 11, 6), toMs: endMs, line: 3 },
    ]);
  });

  it('never begin before release', () => {
    const rows = readRows(LOW_1, HIGH_1, LOW_2, HIGH_2);
    const later = RELEASE_MS + 2 * HOUR_MS;
    const { phases } = batchPhases(both, () => later, rows, 'v.csv', 3);
    expect(phases.map(({ validFromMs }) => validFromMs)).toEqual([
      later,
      Date.UTC(2026, 11, 7),
      later,
      Date.UTC(2026, 11, 6),
    ]);
  });

  it.each([
    [
      Date.UTC(2026, 11, 6, 1),
      'v.csv:2: valid_until of B-SAT-1 is 2026-12-06T00:00:00.000Z, but it is released at 2026-12-06T01:00:00.000Z',
    ],
  ])('are refused where one ends before release', (releaseMs, message) => {
    const rows = readRows(LOW_1, HIGH_1, LOW_2, HIGH_2);
    expect(() => batchPhases(both, () => releaseMs, rows, 'v.csv', 3)).toThrow(new InputError(message));
  });

  it('are refused where an object is released after the window', () => {
    expect(() =>
      batchPhases(
        sets,
        (designator) => RELEASE_MS + (designator === 'B-SAT-2' ? 48 * HOUR_MS : 0),
        undefined,
        undefined,
        2,
      ),
    ).toThrow(/^B-SAT-2 is released at 2026-12-07T15:22:30.000Z, after the end of the window/);
  });
});
