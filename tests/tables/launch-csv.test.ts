import { describe, expect, it } from 'vitest';
import { LAUNCH_CAUTION } from '../../src/caution.js';
import { BATCH_OBJECT_COLUMNS, writeBatchObjectsCsv } from '../../src/tables/batch-objects-csv.js';
import {
  BATCH_PAIR_COLUMNS,
  type BatchPair,
  sortBatchPairs,
  writeBatchPairsCsv,
} from '../../src/tables/batch-pairs-csv.js';
import { type LiftoffRow, SLIP_COLUMNS, writeSlipsCsv } from '../../src/tables/slips-csv.js';
import { collect, strictCsv } from './strict-csv.js';

const LIFTOFF_MS = Date.UTC(2026, 11, 5, 14, 20);

/** Loaders go by position: these stand first and in this order for good. */
const SLIPS =
  'liftoff_utc slip_min best_rank clear why_not encounters violations flying_along closest_object1 closest_object2 ' +
  'closest_object2_name closest_tca_utc closest_miss_distance_m closest_probability most_probable_object1 ' +
  'most_probable_object2 most_probable_object2_name most_probable_tca_utc most_probable_miss_distance_m ' +
  'most_probable_probability caution';
const PAIRS =
  'object1_designator object1_name object2_designator object2_name closest_utc closest_distance_m ' +
  'closest_relative_speed_m_s slowest_relative_speed_m_s last_inside_utc trend trend_m_per_day end_utc ' +
  'end_distance_m remarks caution';
const OBJECTS =
  'designator name file line number_in_file epoch_utc release_utc screened_from_utc screened_until_utc ' +
  'sigma_r_from_m sigma_t_from_m sigma_n_from_m sigma_r_until_m sigma_t_until_m sigma_n_until_m sigma_source caution';

const pair = (changes: Partial<BatchPair> = {}): BatchPair => ({
  object1: { designator: 'B-A', name: '=A' },
  object2: { designator: 'B-B', name: 'B, second' },
  closestMs: LIFTOFF_MS,
  closestDistanceM: 40.12345,
  closestSpeedMPerS: 0.02,
  slowestMPerS: 0.0198,
  lastInsideMs: LIFTOFF_MS + 1500,
  trend: 'OPENING',
  trendMPerDay: 5123.44,
  endMs: LIFTOFF_MS + 2000,
  endDistanceM: 26_000,
  remarks: ['closest-at-start', 'flies-along'],
  ...changes,
});

describe('tables of a launch', () => {
  it.each([
    ['slips.csv', SLIP_COLUMNS, SLIPS],
    ['batch-pairs.csv', BATCH_PAIR_COLUMNS, PAIRS],
    ['batch-objects.csv', BATCH_OBJECT_COLUMNS, OBJECTS],
  ] as const)('%s keeps its columns, each with a meaning', (_, columns, expected) => {
    expect(columns.map(({ name }) => name).slice(0, expected.split(' ').length)).toEqual(expected.split(' '));
    expect(columns.every(({ meaning }) => meaning.length > 5)).toBe(true);
  });

  it('tell a liftoff, with empty cells where nothing is met', async () => {
    const clear: LiftoffRow = {
      liftoffMs: LIFTOFF_MS - 90_000,
      slipMs: -90_000,
      bestRank: 1,
      isClear: true,
      broken: [],
      whyNot: '',
      encounters: 0,
      violations: 0,
      flyingAlong: 0,
      closest: undefined,
      mostProbable: undefined,
    };
    const met = {
      object1Designator: 'B-A',
      object2Designator: '97001',
      object2Name: 'INVENTED, 1',
      tcaMs: LIFTOFF_MS + 86_400_000,
      missDistanceM: 651.3891,
      collisionProbability: 1.877312e-6,
    };
    const other: LiftoffRow = {
      ...clear,
      isClear: false,
      whyNot: '1 closer than 5 km; 1 without a probability',
      encounters: 2,
      violations: 1,
      closest: { ...met, collisionProbability: undefined },
      mostProbable: met,
    };
    const [, first, second] = strictCsv(await collect((output) => writeSlipsCsv(output, [clear, other])));
    expect(first).toEqual([
      '2026-12-05T14:18:30.000Z',
      ...['-1.500', '1', 'YES', '', '0', '0', '0'],
      ...Array(12).fill(''),
      LAUNCH_CAUTION,
    ]);
    expect(second.slice(3)).toEqual([
      ...['NO', '1 closer than 5 km; 1 without a probability', '2', '1', '0'],
      ...['B-A', '97001', 'INVENTED, 1', '2026-12-06T14:20:00.000Z', '651.389', ''],
      ...['B-A', '97001', 'INVENTED, 1', '2026-12-06T14:20:00.000Z', '651.389', '1.87731E-06'],
      LAUNCH_CAUTION,
    ]);
  });

  it('tell a pair', async () => {
    const [, row] = strictCsv(await collect((output) => writeBatchPairsCsv(output, [pair()])));
    expect(row).toEqual([
      ...['B-A', "'=A", 'B-B', 'B, second'],
      ...['2026-12-05T14:20:00.000Z', '40.123', '0.0200', '0.0198', '2026-12-05T14:20:01.500Z'],
      ...['OPENING', '5123.4', '2026-12-05T14:20:02.000Z', '26000.000', 'closest-at-start flies-along'],
      LAUNCH_CAUTION,
    ]);
  });

  it('put the closest pair first, then go by designators', () => {
    const pairs = [
      pair({ closestDistanceM: 9 }),
      pair({ closestDistanceM: 5, object2: { designator: 'B-D', name: '' } }),
      pair({ closestDistanceM: 5, object2: { designator: 'B-C', name: '' } }),
    ];
    expect(sortBatchPairs(pairs).map(({ object2 }) => object2.designator)).toEqual(['B-C', 'B-D', 'B-B']);
  });

  it('tell which object a designator is', async () => {
    const [, row] = strictCsv(
      await collect((output) =>
        writeBatchObjectsCsv(output, [
          {
            designator: 'B-#3',
            name: '',
            file: 'batch.tle',
            line: 5,
            numberInFile: '90001',
            epochMs: LIFTOFF_MS,
            releaseMs: LIFTOFF_MS + 1000,
            screenedFromMs: LIFTOFF_MS + 2000,
            screenedToMs: LIFTOFF_MS + 3000,
            sigmaFromRtnM: [1, 2, 3],
            sigmaToRtnM: [4, 5, 6],
            sigmaSource: 'sigma.csv:2',
          },
        ]),
      ),
    );
    expect(row).toEqual([
      ...['B-#3', '', 'batch.tle', '5', '90001'],
      ...[0, 1, 2, 3].map((second) => `2026-12-05T14:20:0${second}.000Z`),
      ...['1.000', '2.000', '3.000', '4.000', '5.000', '6.000', 'sigma.csv:2'],
      LAUNCH_CAUTION,
    ]);
  });
});
