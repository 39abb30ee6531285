import stringWidth from 'string-width';
import { describe, expect, test } from 'vitest';
import { CAUTION } from '../../src/caution.js';
import type { Conjunction } from '../../src/tables/conjunction.js';
import {
  formatCaution,
  formatConjunctionTable,
  formatElementAges,
  formatFileCounts,
} from '../../src/tables/terminal-table.js';
import { padOrCut, terminalText, wrapWords } from '../../src/tables/terminal-text.js';
import { EXAMPLE_TCA_MS, exampleConjunction, exampleObject } from './example-conjunction.js';

function tableOf(ranked: readonly Conjunction[], limit: number): string {
  return formatConjunctionTable({ count: ranked.length, at: (index) => ranked[index] }, limit);
}

const named = (name: string) => exampleConjunction({ object1: exampleObject({ name }) });

describe('the table of conjunctions', () => {
  test('says when, who, how close, how likely and why to distrust it', () => {
    const conjunction = exampleConjunction({ remarks: ['stale-elements', 'slow-encounter'] });
    expect(tableOf([conjunction], 10)).toBe(`1 conjunction, by collision probability:

Rank  TCA (UTC)            Objects                         Miss m   Radial m  Speed m/s  Probability
   1  2026-12-02 03:14:16  799990001 LARKSPUR 1             715.7       27.4    14762.1      1.2E-05
                           799995002 THISTLE DEB        at most 4.5E-05; ages 1.5, -0.3 d;
                                                        stale-elements slow-encounter

Radial: of object 2 minus object 1, along the position of object 1. At most: the highest
probability that any common scaling of the sigmas gives. Ages: of the elements of objects 1 and 2
at closest approach.
`);
  });

  test('fits 100 columns whatever letters the names have', () => {
    const names = [
      '鵲橋三號鵲橋三號鵲橋三號鵲橋三號',
      'LARKSPUR '.repeat(9),
      '🛰️🛰️ é́ Å',
      'Größe',
      '',
      'ｆｕｌｌ　ｗｉｄｔｈ',
    ];
    const text = tableOf(names.map(named), 10);
    const lines = text.split('\n').filter((line) => line !== '');
    for (const line of lines) expect(stringWidth(line), line).toBeLessThanOrEqual(100);
    // The figures stand under their heads: the lines of the encounters end in the same column.
    const ends = lines.filter((line) => /^ {3}\d /.test(line)).map((line) => stringWidth(line));
    expect(ends).toEqual(names.map(() => 100));
  });

  test('shows the first rows and says how many there are', () => {
    const many = Array.from({ length: 30 }, (_, i) => exampleConjunction({ tcaMs: EXAMPLE_TCA_MS + i }));
    const text = tableOf(many, 5);
    expect(text).toContain('The first 5 of 30 conjunctions');
    expect(text.match(/^ {3}\d {2}2026/gm)).toHaveLength(5);
    expect(text).not.toContain('without a probability');
  });

  test('shows the nearest without a probability, that no one overlooks them', () => {
    const ranked = [
      ...Array.from({ length: 12_000 }, () => exampleConjunction()),
      ...Array.from({ length: 5 }, (_, i) =>
        exampleConjunction({
          collisionProbability: i === 0 ? Number.NaN : undefined,
          collisionProbabilityMax: undefined,
          missDistanceM: 10 + i,
          remarks: ['no-covariance'],
        }),
      ),
    ];
    const text = tableOf(ranked, 2);
    expect(text).toContain('5 conjunctions without a probability at the end of the ranking, nearest first:');
    expect(text).toMatch(/^12001 .* 10\.0 .* none$/m);
    expect(text).toMatch(/^12003 .* 12\.0 .* none$/m);
    expect(text).not.toMatch(/^12004/m);
    for (const line of text.split('\n')) expect(stringWidth(line)).toBeLessThanOrEqual(100);
    expect(tableOf(ranked.slice(-1), 2)).not.toContain('without a probability');
  });

  test('lets no name steer the terminal', () => {
    const text = tableOf([named('\u001B[31mRED\u001B[0m\r\n\tX\u202EY\u009B2J\u2028Z')], 10);
    // biome-ignore lint/suspicious/noControlCharactersInRegex: they are what must not be there
    expect(text).not.toMatch(/[\u0000-\u0009\u000B-\u001F\u007F-\u009F\u2028\u202A-\u202E]/);
    expect(text).toContain('?[31mRED?[0m??');
    expect(text.split('\n')).toHaveLength(10);
  });

  test('says so when there is nothing', () => {
    expect(tableOf([], 10)).toBe('No conjunctions in the window.\n');
  });
});

describe('counts and ages', () => {
  const count = { file: 'fleet.tle', sha256: '', read: 12, used: 10, superseded: 1, rejected: 1 };

  test('what was read is accounted for, by file and in all', () => {
    const catalog = { file: '-', sha256: '', read: 1000, used: 990, superseded: 0, rejected: 10 };
    expect(formatFileCounts([count, catalog])).toBe(`Element sets:
    12 read =   10 used +    1 superseded +    1 rejected  fleet.tle
  1000 read =  990 used +    0 superseded +   10 rejected  standard input
  1012 read = 1000 used +    1 superseded +   11 rejected  in all
`);
    expect(formatFileCounts([count]).split('\n')).toHaveLength(3);
  });

  test('ages have youngest, median, oldest and whose it is', () => {
    const ages = [3, -0.01, 1, 40.26].map((ageDays, i) => ({ designator: String(79_001 + i), ageDays }));
    expect(formatElementAges('Fleet', ages)).toBe(
      'Fleet: 4 element sets, age at the start of the window 0.0 to 40.3 d, median 2.0 d; oldest 79004\n',
    );
    expect(formatElementAges('Fleet', ages.slice(0, 1))).toContain('1 element set, age');
    expect(formatElementAges('Fleet', [])).toBe('Fleet: no element sets\n');
  });
});

test('the caution is one unbroken line', () => {
  expect(formatCaution()).toBe(`${CAUTION}\n`);
});

describe('text for a terminal', () => {
  test('is cut or padded by columns, between letters', () => {
    expect(padOrCut('ABC', 5)).toBe('ABC  ');
    expect(padOrCut('ABCDEF', 5)).toBe('ABCD…');
    expect(padOrCut('鵲橋三號', 6)).toBe('鵲橋… ');
    expect(padOrCut('e\u0301e\u0301e\u0301', 2)).toBe('e\u0301…');
  });

  test('keeps the joiners that some scripts need', () => {
    expect(terminalText('می\u200Cخواهم')).toBe('می\u200Cخواهم');
    expect(terminalText('A\uD800B')).toBe('A?B');
  });

  test('is wrapped at blanks', () => {
    expect(wrapWords('one two three', 7)).toEqual(['one two', 'three']);
    expect(wrapWords('unbreakable x', 4)).toEqual(['unbreakable', 'x']);
  });
});
