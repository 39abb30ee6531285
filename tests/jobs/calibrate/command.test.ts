import { readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { gzipSync } from 'node:zlib';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { CAUTION } from '../../../src/caution.js';
import { runInMemory } from '../../cli/run-in-memory.js';
import { expectedSigmaRtnM } from '../../synthetic/element-errors.js';
import { type SyntheticHistory, syntheticHistory } from '../../synthetic/history.js';
import { toTwoLine } from '../../synthetic/two-line.js';
import { csvRecords, newFolder, removeFolders, resultsIn } from './run-calibration.js';

const LAW = { radialM: 60, transverseM: 250, transverseMPerDay: 600, normalM: 90 };

afterAll(removeFolders);

describe('wideberth calibrate', () => {
  let folder: string;
  let history: SyntheticHistory;
  let outcome: Awaited<ReturnType<typeof runInMemory>>;
  beforeAll(async () => {
    folder = newFolder();
    history = syntheticHistory({
      seed: 5,
      objects: 12,
      startMs: Date.UTC(2026, 8, 1),
      days: 100,
      setsPerDay: 1.5,
      law: LAW,
      maneuvering: 4,
    });
    const lines = history.sets.map((set) => toTwoLine(set).join('\n'));
    const half = Math.floor(lines.length / 2);
    writeFileSync(join(folder, 'old.tle'), `${lines.slice(0, half).join('\n')}\n`);
    const broken = lines[half].replace(/.\n/, (end) => `${(Number(end[0]) + 1) % 10}\n`);
    writeFileSync(
      join(folder, 'new.tle'),
      gzipSync(`${broken}\n${lines.slice(half).join('\n')}\n${lines[3]}\n`),
    );
    outcome = await runInMemory(
      'calibrate',
      '--history',
      join(folder, '*.tle'),
      '--out',
      join(folder, 'sigma.csv'),
    );
  });

  test('measures the law that made the sets, from files of two-line sets, rounded and with drag', () => {
    expect(outcome.status).toBe(0);
    const rows = csvRecords(readFileSync(join(folder, 'sigma.csv'), 'utf8'));
    const seven = rows.find((row) => row.object_designator === '' && row.age_d === '7')!;
    const known = expectedSigmaRtnM(LAW, 7, history.sets[0]);
    const tolerance = (3 * 2 * 1.166) / Math.sqrt(Number(seven.samples));
    [seven.sigma_r_m, seven.sigma_t_m, seven.sigma_n_m].forEach((sigma, axis) => {
      // Two-line sets round the angles to 1e-4 deg: 12 m in low orbit, small beside all of these.
      expect(Math.abs(Number(sigma) / known[axis] - 1), `axis ${axis}`).toBeLessThan(tolerance);
    });
  });

  test('finds every maneuver and no other', () => {
    const listed = csvRecords(resultsIn(folder)['.maneuvers.csv']);
    expect(listed.map((row) => row.object_designator)).toEqual(
      history.maneuvers.map((maneuver) => maneuver.designator),
    );
    listed.forEach((row, i) => {
      const { ms, changeMPerS } = history.maneuvers[i];
      expect(Date.parse(row.last_epoch_before_utc)).toBeLessThan(ms);
      expect(Date.parse(row.first_epoch_after_utc)).toBeGreaterThan(ms);
      // Gauss, near-circular: da = 2 dv / n; n = 1.04e-3 rad/s at 780 km.
      expect(Number(row.semi_major_axis_change_m) / ((2 * changeMPerS) / 1.042e-3)).toBeCloseTo(1, 0);
    });
  });

  test('says what it read, and names the faulty set', () => {
    const { sets } = history;
    expect(outcome.stdout).toContain(`Read ${sets.length + 2} sets from 2 files:`);
    expect(outcome.stdout).toContain('1 copies, 0 superseded, 1 rejected.');
    expect(outcome.stdout).toContain(CAUTION);
    expect(outcome.stderr).toContain('faulty sets left out: 1, listed in');
    expect(resultsIn(folder)['.unused.csv']).toMatch(/new\.tle,1,300006,rejected,/);
  });

  test.each([
    [['--out', 'x.csv'], /no history: give --history FILE/],
    [['--history', 'nowhere/*.tle', '--out', 'x.csv'], /nowhere\/\*\.tle: there is no such file/],
    [['--history', 'a.tle'], /no place for the table: give --out CSV/],
    [
      ['--history', 'a.tle', '--out', 'x.csv', '--common-error-factor', '0.5'],
      /--common-error-factor is 0\.5: it must be/,
    ],
  ])('%j ends with status 2', async (args, message) => {
    const refused = await runInMemory('calibrate', ...args);
    expect(refused.status).toBe(2);
    expect(refused.stderr).toMatch(message);
    expect(refused.stdout).toBe('');
  });

  test('--help fits into 80 columns and carries the caution', async () => {
    const { stdout, status } = await runInMemory('calibrate', '--help');
    expect(status).toBe(0);
    expect(Math.max(...stdout.split('\n').map((line) => line.length))).toBeLessThan(80);
    expect(stdout.replace(/\n/g, ' ')).toContain(CAUTION);
  });
});
