import { describe, expect, test } from 'vitest';
import { CAUTION } from '../../src/caution.js';
import type { Conjunction } from '../../src/tables/conjunction.js';
import { CONJUNCTION_COLUMNS } from '../../src/tables/conjunctions-csv.js';
import { writeCsv } from '../../src/tables/csv-text.js';
import { exampleConjunction, exampleObject } from './example-conjunction.js';
import { collect, strictCsv } from './strict-csv.js';

/** As loaders by position expect them; nothing before the last may ever change. */
const HEADER =
  'rank,tca_utc,object1_designator,object1_name,object2_designator,object2_name,miss_distance_m,' +
  'relative_speed_m_s,relative_position_r_m,relative_position_t_m,relative_position_n_m,' +
  'relative_velocity_r_m_s,relative_velocity_t_m_s,relative_velocity_n_m_s,collision_probability,' +
  'collision_probability_method,collision_probability_max,mahalanobis_distance,hard_body_radius_m,' +
  'object1_sigma_r_m,object1_sigma_t_m,object1_sigma_n_m,object2_sigma_r_m,object2_sigma_t_m,' +
  'object2_sigma_n_m,object1_element_age_d,object2_element_age_d,remarks,caution,' +
  'collision_probability_foster,pair_probability,screen_entry_utc,screen_exit_utc';

async function records(conjunctions: readonly Conjunction[]): Promise<Record<string, string>[]> {
  const [header, ...rows] = strictCsv(
    await collect((output) => writeCsv(output, CONJUNCTION_COLUMNS, conjunctions)),
  );
  return rows.map((row) => Object.fromEntries(header.map((name, i) => [name, row[i]])));
}

test('the header has the columns in their fixed order', async () => {
  expect(await collect((output) => writeCsv(output, CONJUNCTION_COLUMNS, []))).toBe(`${HEADER}\r\n`);
});

test('every column says what it means', () => {
  for (const column of CONJUNCTION_COLUMNS) expect(column.meaning.length).toBeGreaterThan(8);
});

test('a record has every figure in its column', async () => {
  expect(await records([exampleConjunction({ remarks: ['stale-elements', 'slow-encounter'] })])).toEqual([
    {
      rank: '1',
      tca_utc: '2026-12-02T03:14:15.926Z',
      object1_designator: '799990001',
      object1_name: 'LARKSPUR 1',
      object2_designator: '799995002',
      object2_name: 'THISTLE DEB',
      miss_distance_m: '715.748',
      relative_speed_m_s: '14762.0854',
      relative_position_r_m: '27.364',
      relative_position_t_m: '-93.746',
      relative_position_n_m: '709.054',
      relative_velocity_r_m_s: '-7.1951',
      relative_velocity_t_m_s: '-14693.1000',
      relative_velocity_n_m_s: '-1426.2500',
      collision_probability: '1.23457E-05',
      collision_probability_method: 'FOSTER-1992',
      collision_probability_max: '4.50000E-05',
      mahalanobis_distance: '1.2346',
      hard_body_radius_m: '7.500',
      object1_sigma_r_m: '120.500',
      object1_sigma_t_m: '900.250',
      object1_sigma_n_m: '160.125',
      object2_sigma_r_m: '210.000',
      object2_sigma_t_m: '2400.000',
      object2_sigma_n_m: '330.000',
      object1_element_age_d: '1.5000',
      object2_element_age_d: '-0.2500',
      remarks: 'stale-elements slow-encounter',
      caution: CAUTION,
      collision_probability_foster: '1.23457E-05',
      pair_probability: '2.50000E-05',
      screen_entry_utc: '2026-12-02T03:14:15.586Z',
      screen_exit_utc: '2026-12-02T03:14:16.266Z',
    },
  ]);
});

test('a cell is empty where there is no figure', async () => {
  const [record] = await records([
    exampleConjunction({
      collisionProbability: undefined,
      collisionProbabilityMax: undefined,
      collisionProbabilityFoster: Number.NaN,
      mahalanobisDistance: undefined,
      pairProbability: undefined,
      screenEntryMs: undefined,
      screenExitMs: undefined,
    }),
  ]);
  for (const name of [
    'collision_probability',
    'collision_probability_max',
    'collision_probability_foster',
    'mahalanobis_distance',
    'pair_probability',
    'screen_entry_utc',
    'screen_exit_utc',
    'remarks',
  ])
    expect(record[name], name).toBe('');
  expect(Object.values(record).join(' ')).not.toMatch(/NaN|undefined|null|Infinity/);
});

describe('names', () => {
  test('with commas, quotes, line breaks and other alphabets shift no column', async () => {
    const names = ['A, B', 'THE "BIG" ONE', 'TWO\r\nLINES', 'ЗАРЯ-9', '鵲橋 三號', ''];
    const read = await records(
      names.map((name) =>
        exampleConjunction({
          object1: exampleObject({ name }),
          object2: exampleObject({ designator: '5', name }),
        }),
      ),
    );
    expect(read.map((record) => record.object1_name)).toEqual(names);
    expect(read.map((record) => record.object2_name)).toEqual(names);
    for (const record of read) expect(record.caution).toBe(CAUTION);
    expect(read.map((record) => record.rank)).toEqual(['1', '2', '3', '4', '5', '6']);
  });

  test('that look like formulas are made harmless, negative numbers stay numbers', async () => {
    const [record] = await records([
      exampleConjunction({ object1: exampleObject({ name: '=HYPERLINK("x")' }) }),
    ]);
    expect(record.object1_name).toBe(`'=HYPERLINK("x")`);
    expect(Number(record.relative_position_t_m)).toBe(-93.746);
  });
});
