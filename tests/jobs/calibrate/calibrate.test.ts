import { existsSync, readdirSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { CAUTION } from '../../../src/caution.js';
import type { ElementSet, UnusedElements } from '../../../src/elements/element-set.js';
import { orbitOf } from '../../../src/elements/orbit.js';
import { InputError } from '../../../src/input-error.js';
import { calibrate } from '../../../src/jobs/calibrate/calibrate.js';
import { defaultSigmaTable } from '../../../src/uncertainty/default-sigma-table.js';
import {
  readSigmaTable,
  SIGMA_COLUMNS,
  sigmaAt,
  sigmaCurveFor,
} from '../../../src/uncertainty/sigma-table.js';
import { type ErrorLaw, expectedSigmaRtnM } from '../../synthetic/element-errors.js';
import { seededRandom } from '../../synthetic/random.js';
import {
  type Calibration,
  csvRecords,
  newFolder,
  removeFolders,
  resultsIn,
  runCalibration,
} from './run-calibration.js';
import { type SyntheticManeuver, syntheticHistory } from './synthetic-history.js';

const LAW: ErrorLaw = { radialM: 60, transverseM: 200, transverseMPerDay: 400, normalM: 90 };
const ORBIT = { meanMotionRevPerDay: 14.6, inclinationDeg: 40, eccentricity: 0.002 };
const START_MS = Date.UTC(2030, 0, 1);
const MS_PER_DAY = 86_400_000;

function object(
  number: number,
  options: {
    days?: number;
    maneuvers?: readonly SyntheticManeuver[];
    setsPerDay?: number;
  } = {},
): ElementSet[] {
  return syntheticHistory({
    designator: 310_000 + number,
    seed: number,
    startMs: START_MS,
    days: options.days ?? 200,
    setsPerDay: options.setsPerDay ?? 2,
    law: LAW,
    maneuvers: options.maneuvers ?? [],
    ...ORBIT,
  });
}

/** Each object in a file of its own. */
function filesOf(objects: ReadonlyArray<readonly ElementSet[]>): Record<string, readonly ElementSet[]> {
  return Object.fromEntries(objects.map((sets, i) => [`h${i}.tle`, sets]));
}

function shuffled<T>(items: readonly T[], seed: number): T[] {
  const random = seededRandom(seed);
  const rest = [...items];
  return items.map(() => rest.splice(random.integer(rest.length), 1)[0]);
}

function sigmas(row: Record<string, string>): number[] {
  return [Number(row.sigma_r_m), Number(row.sigma_t_m), Number(row.sigma_n_m)];
}

function reportCount(report: string, label: string): number {
  const line = report.split('\n').find((each) => each.trim().startsWith(label));
  return Number(line?.trim().slice(label.length));
}

afterAll(removeFolders);

describe('a history whose errors follow a known law', () => {
  let run: Calibration;
  let rows: Record<string, string>[];
  beforeAll(async () => {
    run = await runCalibration(filesOf(Array.from({ length: 14 }, (_, i) => object(i))));
    rows = csvRecords(run.results['.csv']);
  });

  test('gives back the law of the class within its confidence limits', () => {
    const ofClass = rows.filter((row) => row.object_designator === '');
    expect(ofClass.map((row) => Number(row.age_d))).toEqual([0, 0.5, 1, 2, 3, 5, 7, 10, 14, 21, 30]);
    for (const row of ofClass.filter(({ age_d }) => Number(age_d) > 0 && Number(age_d) <= 14)) {
      // Errors are drawn anew for each set: the relative error of a scaled MAD is 1.166 / sqrt n, of the
      // difference; taking the newer set off adds at most a factor of 2. The fit smooths that further.
      const tolerance = (3 * 2 * 1.166) / Math.sqrt(Number(row.samples));
      const known = expectedSigmaRtnM(LAW, Number(row.age_d), ORBIT);
      sigmas(row).forEach((sigma, axis) => {
        expect(Math.abs(sigma / known[axis] - 1), `age ${row.age_d}, axis ${axis}`).toBeLessThan(tolerance);
      });
    }
  });

  test('the error of the newer set is taken off, not left in: at the epoch one sigma, not sqrt 2 of it', () => {
    const [radial, transverse, normal] = sigmas(rows[0]);
    expect(rows[0].age_d).toBe('0');
    expect(rows[0].samples).toBe('0');
    const known = expectedSigmaRtnM(LAW, 0, ORBIT);
    expect(Math.abs(radial / known[0] - 1)).toBeLessThan(0.1);
    expect(Math.abs(normal / known[2] - 1)).toBeLessThan(0.1);
    // Growth sets in before the first age measured: less is known of T.
    expect(Math.abs(transverse / known[1] - 1)).toBeLessThan(0.25);
  });

  test('every object has rows of its own, right at seven days within its confidence limits', () => {
    const own = rows.filter((row) => row.object_designator !== '' && row.age_d === '7');
    expect(own).toHaveLength(14);
    const known = expectedSigmaRtnM(LAW, 7, ORBIT);
    for (const row of own) {
      const tolerance = (3.5 * 2 * 1.166) / Math.sqrt(Number(row.samples));
      sigmas(row).forEach((sigma, axis) => {
        expect(Math.abs(sigma / known[axis] - 1), row.object_designator).toBeLessThan(tolerance);
      });
    }
  });

  test('sigmas never shrink with age', () => {
    for (let i = 1; i < rows.length; i++) {
      if (rows[i].object_designator !== rows[i - 1].object_designator) continue;
      expect(Number(rows[i].age_d)).toBeGreaterThan(Number(rows[i - 1].age_d));
      sigmas(rows[i]).forEach((sigma, axis) => {
        expect(sigma).toBeGreaterThanOrEqual(sigmas(rows[i - 1])[axis]);
      });
    }
  });

  test('a screening reads the table: classes, objects, ages', () => {
    const table = readSigmaTable(run.results['.csv'], 'sigma.csv');
    expect(table.objects.size).toBe(14);
    expect(table.classes).toHaveLength(1);
    const orbit = orbitOf(object(0)[0]);
    const used = sigmaCurveFor(table, defaultSigmaTable(), { ...orbit, designator: '999' });
    expect(used.isDefault).toBe(false);
    expect(sigmaAt(used, 7)[1]).toBe(Number(rows.find((row) => row.age_d === '7')!.sigma_t_m));
    const own = sigmaCurveFor(table, defaultSigmaTable(), { ...orbit, designator: '310003' });
    expect(own).toBe(table.objects.get('310003'));
  });

  test('classes stand before objects, these by designator, below two lines of comment', () => {
    expect(run.results['.csv'].split('\r\n').slice(0, 3)).toEqual([
      `# ${CAUTION}`,
      '# Measured by pairwise differencing; common-error factor 1',
      SIGMA_COLUMNS.join(','),
    ]);
    const designators = [...new Set(rows.map((row) => row.object_designator))];
    expect(designators).toEqual(['', ...Array.from({ length: 14 }, (_, i) => String(310_000 + i))]);
  });

  test.each([
    ['  rows of the object', 8000],
    ['always those of the class', 8000],
  ])('coverage of what was held back is near that of a Gaussian: %s', (label, least) => {
    const line = run.results['.report.txt'].split('\n').find((each) => each.startsWith(`  ${label}`))!;
    const [pairs, ...shares] = line
      .slice(label.length + 2)
      .trim()
      .split(/\s+/)
      .map(Number);
    expect(pairs).toBeGreaterThan(least);
    // Pairs of a set at eight and more ages share its error: a tenth of the pairs counts as independent.
    const allowed = (share: number) => 100 * (4 * Math.sqrt((share * (1 - share)) / (pairs / 10)) + 0.01);
    shares.forEach((share, i) => {
      const gaussian = [0.683, 0.954, 0.997][i % 3];
      expect(Math.abs(share - 100 * gaussian), label).toBeLessThan(allowed(gaussian));
    });
  });

  test('every output carries the caution, the terminal too', () => {
    expect(run.lines).toContain(CAUTION);
    expect(run.results['.report.txt'].replace(/\n/g, ' ')).toContain(CAUTION);
    for (const suffix of ['.bins.csv', '.inputs.csv']) {
      const rowsHere = run.results[suffix].trimEnd().split('\r\n').slice(1);
      expect(rowsHere.length).toBeGreaterThan(0);
      expect(rowsHere.every((row) => row.endsWith(CAUTION))).toBe(true);
    }
  });

  test('nothing else is left in the folder', () => {
    const names = readdirSync(run.folder).filter((name) => !name.startsWith('h'));
    expect(names.sort()).toEqual([
      'sigma.bins.csv',
      'sigma.csv',
      'sigma.inputs.csv',
      'sigma.maneuvers.csv',
      'sigma.report.txt',
      'sigma.unused.csv',
    ]);
  });
});

test('the common-error factor multiplies all sigmas of the table and is told in the report', async () => {
  const files = filesOf(Array.from({ length: 5 }, (_, i) => object(i, { days: 90, setsPerDay: 1.5 })));
  const plain = csvRecords((await runCalibration(files)).results['.csv']);
  const raised = await runCalibration(files, { commonErrorFactor: 1.5 });
  const rows = csvRecords(raised.results['.csv']);
  expect(rows).toHaveLength(plain.length);
  rows.forEach((row, i) => {
    sigmas(row).forEach((sigma, axis) => {
      expect(Math.abs(sigma - 1.5 * sigmas(plain[i])[axis])).toBeLessThan(0.2);
    });
  });
  expect(raised.results['.report.txt']).toContain('Common-error factor: 1.5.');
  expect(raised.lines.join('\n')).toContain('Common-error factor: 1.5.');
});

describe('maneuvers', () => {
  test('are counted, listed, and not averaged in', async () => {
    const maneuvers = [20, 41, 62, 83, 104].map((day) => ({ day, semiMajorAxisM: 400 }));
    const quiet = Array.from({ length: 5 }, (_, i) => object(i, { days: 130 }));
    const busy = Array.from({ length: 5 }, (_, i) => object(i, { days: 130, maneuvers }));
    const without = csvRecords((await runCalibration(filesOf(quiet))).results['.csv']);
    const { results, lines } = await runCalibration(filesOf(busy));
    expect(lines.join('\n')).toContain('Maneuvers recognized: 25, of 5 objects');
    const listed = csvRecords(results['.maneuvers.csv']);
    expect(listed).toHaveLength(25);
    listed.forEach((row, i) => {
      const burnMs = START_MS + maneuvers[i % 5].day * MS_PER_DAY;
      expect(Date.parse(row.last_epoch_before_utc)).toBeLessThanOrEqual(burnMs);
      expect(Date.parse(row.first_epoch_after_utc)).toBeGreaterThan(burnMs);
      expect(Math.abs(Number(row.semi_major_axis_change_m) - 400)).toBeLessThan(25);
    });
    expect(
      reportCount(results['.report.txt'], 'pairs left out: a maneuver between the sets'),
    ).toBeGreaterThan(2000);
    // An unseen change of 400 m in the axis drifts 39 km in seven days; 2.8 km are the errors of the sets.
    const seven = (rows: Record<string, string>[]) =>
      sigmas(rows.find((row) => row.object_designator === '' && row.age_d === '7')!);
    expect(Math.abs(seven(csvRecords(results['.csv']))[1] / seven(without)[1] - 1)).toBeLessThan(0.15);
  });

  test('a steady bias beyond the sigma keeps an object from rows of its own', async () => {
    // Thrust that never pauses: 5 m of axis twice a day, below the scatter of the elements.
    const thrust = Array.from({ length: 400 }, (_, i) => ({ day: i / 2 + 0.2, semiMajorAxisM: 5 }));
    const objects = Array.from({ length: 7 }, (_, i) => object(i, i === 3 ? { maneuvers: thrust } : {}));
    const { results } = await runCalibration(filesOf(objects));
    const own = new Set(csvRecords(results['.csv']).map((row) => row.object_designator));
    expect(own.has('310003')).toBe(false);
    expect(own.size).toBe(7);
    expect(reportCount(results['.report.txt'], 'with the rows of their class: biased')).toBe(1);
    expect(results['.report.txt'].replace(/\s+/g, ' ')).toContain('rows of their class: 1, 310003.');
    const bins = csvRecords(results['.bins.csv']).filter((row) => row.object_designator === '310003');
    expect(bins.every((row) => row.standing === 'biased')).toBe(true);
    const seven = bins.find((row) => row.age_d === '7')!;
    expect(Math.abs(Number(seven.bias_t_m))).toBeGreaterThan(1.2 * Number(seven.difference_sigma_t_m));
  });
});

test('neither the order of files nor that of sets, nor how they are parted, changes a byte', async () => {
  const sets = Array.from({ length: 6 }, (_, i) =>
    object(i, { days: 110, setsPerDay: 1.5, maneuvers: [{ day: 50, semiMajorAxisM: 300 }] }),
  ).flat();
  const third = Math.ceil(sets.length / 3);
  const parted = (items: readonly ElementSet[]) => ({
    'a.tle': items.slice(0, third),
    'b.tle': items.slice(third, 2 * third),
    'c.tle': items.slice(2 * third),
  });
  const first = await runCalibration(parted(sets));
  const others = [
    await runCalibration(parted(sets), { names: ['c.tle', 'a.tle', 'b.tle'], folder: first.folder }),
    await runCalibration(parted(shuffled(sets, 8)), { folder: first.folder }),
    await runCalibration({ 'z.tle': [], 'y.tle': shuffled(sets, 9) }, { folder: first.folder }),
  ];
  for (const { results } of others) {
    for (const suffix of ['.csv', '.bins.csv', '.maneuvers.csv']) {
      expect(results[suffix], suffix).toBe(first.results[suffix]);
    }
  }
  expect(others[0].results).toEqual(first.results);
  expect(csvRecords(first.results['.csv']).length).toBeGreaterThan(20);
});

describe('what is not used', () => {
  test('copies collapse, other elements at the same epoch are superseded, faulty sets are listed: counts add up', async () => {
    const objects = Array.from({ length: 6 }, (_, i) => object(i, { days: 120 }));
    const clean = await runCalibration(filesOf(objects));
    const files: Record<string, ReadonlyArray<ElementSet | UnusedElements>> = filesOf(objects);
    const copy = { ...objects[0][10], epochMs: objects[0][10].epochMs + 0.4 };
    // Smaller in the first element that differs: the set that was there stays.
    const rival = { ...objects[1][20], meanMotionRevPerDay: objects[1][20].meanMotionRevPerDay - 1e-6 };
    const source = (line: number) => ({ file: '', line, text: '1 faulty' });
    const rejected = (line: number): UnusedElements => ({
      source: source(line),
      designator: '310000',
      reason: 'rejected',
      detail: `checksum 3, expected ${line}`,
    });
    const impossible = {
      ...objects[2][5],
      epochMs: START_MS + 3,
      eccentricity: 0.99,
      meanAnomalyDeg: 0,
      source: source(77),
    };
    const nameless = { ...objects[2][5], designator: 'X12', source: source(79) };
    const lonely = { ...objects[0][0], designator: '320000', source: source(81) };
    files['zz.tle'] = [copy, rejected(1), ...objects[3], rival, rejected(3), impossible, nameless, lonely];
    const { results, lines } = await runCalibration(files);

    expect(results['.csv']).toBe(clean.results['.csv']);
    const inputs = csvRecords(results['.inputs.csv']);
    expect(inputs).toHaveLength(7);
    for (const row of inputs) {
      const [read, ...parts] = ['read', 'paired', 'unpaired', 'copies', 'superseded', 'rejected'].map(
        (name) => Number(row[name]),
      );
      expect(parts.reduce((sum, part) => sum + part, 0)).toBe(read);
    }
    const last = inputs.find((row) => row.file.endsWith('zz.tle'))!;
    expect(last).toMatchObject({
      read: String(objects[3].length + 7),
      paired: '0',
      unpaired: '1',
      copies: String(objects[3].length + 1),
      superseded: '1',
      rejected: '4',
    });
    const total = objects.reduce((sum, sets) => sum + sets.length, 0) + objects[3].length + 7;
    expect(lines[0]).toContain(`Read ${total} sets from 7 files`);
    expect(lines[0]).toContain('1 superseded, 4 rejected');

    const unused = results['.unused.csv'];
    expect(unused).toContain('zz.tle,1,310000,rejected,,"checksum 3, expected 1",1 faulty,');
    expect(unused).toContain('zz.tle,77,310002,rejected,,SGP4 gives no state at the epoch,');
    expect(unused).toContain(
      'zz.tle,79,X12,rejected,,designator X12 is not a catalog number of up to nine digits,',
    );
    expect(unused).toMatch(/zz\.tle,41,310001,superseded,,"same epoch as the set in .*h1\.tle, line 41, /);
    expect(unused.trimEnd().split('\r\n')).toHaveLength(1 + 5);
    expect(results['.report.txt']).toMatch(/zz\.tle, line 1: checksum 3, expected 1/);
  });

  test('a set alone with its object counts as unpaired, and a history of such is too thin', async () => {
    const folder = newFolder();
    writeFileSync(join(folder, 'sigma.csv'), 'the table of last night');
    const sets = Array.from({ length: 20 }, (_, i) => object(i, { days: 3 })[0]);
    await expect(runCalibration({ 'thin.tle': sets }, { folder })).rejects.toThrow(
      /^the history is too thin for any row: .*sigma\.csv is not written; .*sigma\.report\.txt says/,
    );
    const results = resultsIn(folder);
    expect(results['.csv']).toBe('the table of last night');
    expect(results['.report.txt']).toContain('20 without a partner');
    expect(results['.report.txt']).toContain('the fit is unchecked');
    expect(results['.report.txt']).toContain('No row at all: the table is not written');
  });
});

describe('places', () => {
  const quiet = { info: () => {}, warn: () => {}, error: () => {} };

  test('a faulty input leaves nothing behind and the last table untouched', async () => {
    const folder = newFolder();
    writeFileSync(join(folder, 'sigma.csv'), 'the table of last night');
    writeFileSync(join(folder, 'a.tle'), '');
    const failing = calibrate(
      { historyPaths: [join(folder, 'a.tle')], outPath: join(folder, 'sigma.csv'), commonErrorFactor: 1 },
      { log: quiet, progress: () => {}, onStop: () => () => {} },
      // biome-ignore lint/correctness/useYield: it fails before it gives anything
      async function* () {
        throw new InputError('a.tle holds no element sets');
      },
    );
    await expect(failing).rejects.toThrow('a.tle holds no element sets');
    expect(readdirSync(folder).sort()).toEqual(['a.tle', 'sigma.csv']);
    expect(resultsIn(folder)['.csv']).toBe('the table of last night');
  });

  test('what a stopped run has written so far is removed', async () => {
    const folder = newFolder();
    writeFileSync(join(folder, 'a.tle'), '');
    const undos: Array<() => void> = [];
    let hidden: string[] = [];
    const stopped = calibrate(
      { historyPaths: [join(folder, 'a.tle')], outPath: join(folder, 'sigma.csv'), commonErrorFactor: 1 },
      {
        log: quiet,
        progress: () => {},
        onStop: (undo) => {
          undos.push(undo);
          return () => {};
        },
      },
      async function* () {
        hidden = readdirSync(folder).filter((name) => name.startsWith('.sigma.calibrate-'));
        yield object(1)[0];
        for (const undo of undos) undo();
        expect(readdirSync(folder)).toEqual(['a.tle']);
      },
    );
    await expect(stopped).rejects.toThrow();
    expect(hidden).toHaveLength(1);
    expect(existsSync(join(folder, hidden[0]))).toBe(false);
  });

  test.each([
    ['missing/sigma.csv', /--out .*missing.sigma\.csv: its folder does not exist/],
    ['inside', /--out .*inside is a folder: name a file in it/],
    ['h0.tle', /--history .*h0\.tle would be overwritten by a result/],
  ])('--out %s is refused', async (out, message) => {
    const folder = newFolder();
    writeFileSync(join(folder, 'h0.tle'), '');
    await import('node:fs').then((fs) => fs.mkdirSync(join(folder, 'inside')));
    const run = calibrate(
      { historyPaths: [join(folder, 'h0.tle')], outPath: join(folder, out), commonErrorFactor: 1 },
      { log: quiet, progress: () => {}, onStop: () => () => {} },
      async function* () {
        yield* object(0);
      },
    );
    await expect(run).rejects.toThrow(message);
    await expect(run).rejects.toBeInstanceOf(InputError);
    expect(readdirSync(folder).sort()).toEqual(['h0.tle', 'inside']);
  });
});
