import { expect, it } from 'vitest';
import { createProgressLog } from '../../src/cli/progress-log.js';

it('tells each quarter of a stage once, and nothing in the first minute', () => {
  const lines: string[] = [];
  let now = 0;
  const show = createProgressLog({ info: (line) => lines.push(line) }, () => now);
  const search = (fraction: number) => show({ stage: 'search', fraction, detail: `${fraction} done` });
  now = 59_999;
  search(0.5);
  expect(lines).toEqual([]);
  now = 60_000;
  search(0.51);
  search(0.6);
  search(0.76);
  search(0.8);
  search(1);
  show({ stage: 'next', fraction: 0.3, detail: 'a' });
  expect(lines).toEqual([
    'search 50 %: 0.51 done',
    'search 75 %: 0.76 done',
    'search 100 %: 1 done',
    'next 25 %: a',
  ]);
});
