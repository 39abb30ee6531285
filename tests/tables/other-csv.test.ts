import { describe, expect, test } from 'vitest';
import { CAUTION } from '../../src/caution.js';
import type { UnusedElements } from '../../src/elements/element-set.js';
import { type CompanionPair, writeCompanionsCsv } from '../../src/tables/companions-csv.js';
import { writeCsv } from '../../src/tables/csv-text.js';
import {
  type ConjunctionSensitivity,
  describeSensitivity,
  SENSITIVITY_COLUMNS,
} from '../../src/tables/sensitivity-csv.js';
import { writeUnusedElementsCsv } from '../../src/tables/unused-elements-csv.js';
import { collect, strictCsv } from './strict-csv.js';

describe('unused-elements.csv', () => {
  const text =
    'LARKSPUR 1\n1 79001U 26901A   26335.50000000  .00000000  00000-0  00000-0 0  9990\n2 79001 "quoted", comma';
  const sets: readonly UnusedElements[] = [
    {
      source: { file: 'night, run.tle', line: 4, text },
      designator: '',
      reason: 'rejected',
      detail: 'bad "sum"',
    },
    {
      source: { file: '-', line: 7, text: '=HYPERLINK(1)' },
      designator: '79002',
      reason: 'failed',
      detail: 'decayed',
      failedAtMs: Date.UTC(2026, 11, 3, 1, 2, 3, 4),
    },
  ];

  test('says where, which, why and when, with the text as it stood', async () => {
    const rows = strictCsv(await collect((output) => writeUnusedElementsCsv(output, sets)));
    expect(rows).toEqual([
      ['file', 'line', 'designator', 'reason', 'failed_at_utc', 'detail', 'text', 'caution'],
      ['night, run.tle', '4', '', 'rejected', '', 'bad "sum"', text, CAUTION],
      [
        'standard input',
        '7',
        '79002',
        'failed',
        '2026-12-03T01:02:03.004Z',
        'decayed',
        "'=HYPERLINK(1)",
        CAUTION,
      ],
    ]);
  });
});

describe('companions.csv', () => {
  const pair = (designator: string, closestDistanceM: number): CompanionPair => ({
    object1: { designator: '79001', name: 'LARKSPUR 1' },
    object2: { designator, name: 'TENDER, "B"' },
    closestMs: Date.UTC(2026, 11, 1),
    closestDistanceM,
    farthestDistanceM: 80.1234,
    fastestMPerS: 0.12345,
    slowestMPerS: 0,
    remarks: ['stale-elements'],
  });

  test('tells each pair once with its extremes', async () => {
    expect(strictCsv(await collect((output) => writeCompanionsCsv(output, [pair('79002', 12.5)])))).toEqual([
      [
        'object1_designator',
        'object1_name',
        'object2_designator',
        'object2_name',
        'closest_utc',
        'closest_distance_m',
        'farthest_distance_m',
        'slowest_relative_speed_m_s',
        'fastest_relative_speed_m_s',
        'remarks',
        'caution',
      ],
      [
        '79001',
        'LARKSPUR 1',
        '79002',
        'TENDER, "B"',
        '2026-12-01T00:00:00.000Z',
        '12.500',
        '80.123',
        '0.0000',
        '0.1235',
        'stale-elements',
        CAUTION,
      ],
    ]);
  });
});

describe('sensitivity.csv', () => {
  const row: ConjunctionSensitivity = {
    rank: 3,
    tcaMs: Date.UTC(2026, 11, 1),
    object1: { designator: '79001' },
    object2: { designator: '79002' },
    probabilityAtHalf: 2.5e-6,
    probabilityAtOnce: 1e-6,
    probabilityAtTwice: 2.6e-7,
    peakScale: 0.4,
    peakProbability: 2.75e-6,
  };

  test('has the figures at three scales, the peak and the direction', async () => {
    const empty = { ...row, probabilityAtHalf: undefined, peakScale: undefined, peakProbability: undefined };
    expect(strictCsv(await collect((output) => writeCsv(output, SENSITIVITY_COLUMNS, [row, empty])))).toEqual(
      [
        [
          'rank',
          'tca_utc',
          'object1_designator',
          'object2_designator',
          'collision_probability_half_sigma',
          'collision_probability_once_sigma',
          'collision_probability_twice_sigma',
          'peak_sigma_scale',
          'collision_probability_peak',
          'direction',
          'caution',
        ],
        [
          '3',
          '2026-12-01T00:00:00.000Z',
          '79001',
          '79002',
          '2.50000E-06',
          '1.00000E-06',
          '2.60000E-07',
          '0.4000',
          '2.75000E-06',
          'diluted: better orbits may raise the probability',
          CAUTION,
        ],
        [
          '3',
          '2026-12-01T00:00:00.000Z',
          '79001',
          '79002',
          '',
          '1.00000E-06',
          '2.60000E-07',
          '',
          '',
          'no figure',
          CAUTION,
        ],
      ],
    );
  });

  test('knows the side of the peak', () => {
    expect(describeSensitivity(1.8)).toBe('better orbits would lower the probability');
    expect(describeSensitivity(1.001)).toMatch(/^at its peak/);
    expect(describeSensitivity(0.2)).toMatch(/^diluted/);
  });
});
