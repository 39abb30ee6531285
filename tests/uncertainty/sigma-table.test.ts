import { describe, expect, it } from 'vitest';
import { InputError } from '../../src/input-error.js';
import { defaultSigmaTable } from '../../src/uncertainty/default-sigma-table.js';
import {
  covarianceRtnM2,
  isBeyond,
  readSigmaTable,
  SIGMA_COLUMNS,
  sigmaAt,
  sigmaCurve,
  sigmaCurveFor,
} from '../../src/uncertainty/sigma-table.js';

const HEADER = SIGMA_COLUMNS.join(',');
const read = (...rows: string[]) => readSigmaTable([HEADER, ...rows, ''].join('\n'), 'sigma.csv');
const orbit = { designator: '70001', perigeeHeightKm: 550, eccentricity: 0.001, inclinationDeg: 53 };
const curveFor = (table: ReturnType<typeof read>, key = orbit) =>
  sigmaCurveFor(table, defaultSigmaTable(), key);

describe('readSigmaTable', () => {
  it('reads classes and objects, and lets an object win over its class', () => {
    const table = read(
      ',0,800,0.1,30,60,0,10,100,20,',
      ',0,800,0.1,30,60,1,30,900,40,17',
      'A0001,,,,,,0.5,1,2,3,0',
    );
    const curve = curveFor(table);
    expect([...curve.ageDays]).toEqual([0, 1]);
    expect([...curve.sigmaRtnM]).toEqual([10, 100, 20, 30, 900, 40]);
    expect(curve).toMatchObject({ isDefault: false, label: 'sigma.csv:2' });
    // A0001 is 100001 in Alpha-5.
    const own = curveFor(table, { ...orbit, designator: '100001' });
    expect([...own.sigmaRtnM]).toEqual([1, 2, 3]);
    expect(own.label).toBe('sigma.csv:4');
  });

  it('joins rows of one class that do not follow each other', () => {
    const table = read(
      ',0,800,0.1,30,60,0,1,1,1,',
      ',0,800,0.1,0,30,0,9,9,9,',
      ',0,800.0,0.10,30,60,2,3,3,3,',
    );
    expect([...curveFor(table).ageDays]).toEqual([0, 2]);
    expect(table.classes).toHaveLength(2);
  });

  it('takes the first of two overlapping classes', () => {
    const table = read(',0,800,0.1,0,90,0,1,1,1,', ',0,2000,0.1,0,180,0,2,2,2,');
    expect(curveFor(table).sigmaRtnM[0]).toBe(1);
    expect(curveFor(table, { ...orbit, inclinationDeg: 97 }).sigmaRtnM[0]).toBe(2);
  });

  it('counts the lower bound as inside and the upper as outside, and an empty bound as none', () => {
    const table = read(',500,600,0.1,30,60,0,1,1,1,', ',,,,,,0,2,2,2,');
    const at = (change: Partial<typeof orbit>) => curveFor(table, { ...orbit, ...change }).sigmaRtnM[0];
    expect(at({ perigeeHeightKm: 500 })).toBe(1);
    expect(at({ perigeeHeightKm: 600 })).toBe(2);
    expect(at({ perigeeHeightKm: 499.9 })).toBe(2);
    expect(at({ inclinationDeg: 30 })).toBe(1);
    expect(at({ inclinationDeg: 29.9 })).toBe(2);
    expect(at({ inclinationDeg: 60 })).toBe(2);
    expect(at({ eccentricity: 0.0999 })).toBe(1);
    expect(at({ eccentricity: 0.1 })).toBe(2);
    expect(at({ perigeeHeightKm: -50, eccentricity: 0.9, inclinationDeg: 180 })).toBe(2);
  });

  it('falls back to the built-in figures where no class covers the orbit, and says so', () => {
    const table = read(',0,300,0.1,30,60,0,10,100,20,');
    const curve = curveFor(table);
    expect(curve.isDefault).toBe(true);
    expect(curve.label).toContain('built-in');
    expect(sigmaCurveFor(undefined, defaultSigmaTable(), orbit)).toBe(curve);
  });

  it('reads any order of columns, Windows line ends, a byte order mark, blanks and comments', () => {
    const columns = SIGMA_COLUMNS.slice(0, -1).toReversed();
    const cells = ['20', '100', '10', '0', '60', '30', '0.1', '800', '0', ''];
    const text = `\uFEFF# made 2026-12-01\r\n${columns.join(' , ')}\r\n\r\n${cells.join(', ')}\r\n`;
    expect([...curveFor(readSigmaTable(text, 'x.csv')).sigmaRtnM]).toEqual([10, 100, 20]);
    expect(curveFor(readSigmaTable(text, 'x.csv')).label).toBe('x.csv:4');
  });

  const good = ',0,800,0.1,30,60,0,10,100,20,';
  it.each<[string, string[], string]>([
    [
      'sigma of 0',
      [',0,800,0.1,30,60,0,10,0,20,'],
      'sigma.csv:2: sigma_t_m is "0", expected a number of meters greater than 0',
    ],
    [
      'negative sigma',
      [good, ',0,800,0.1,30,60,1,-10,1,20,'],
      'sigma.csv:3: sigma_r_m is "-10", expected a number of meters greater than 0',
    ],
    [
      'empty sigma',
      [',0,800,0.1,30,60,0,10,1,,'],
      'sigma.csv:2: sigma_n_m is "", expected a number of meters greater than 0',
    ],
    [
      'text',
      [',0,800,0.1,30,60,0,10,1 km,20,'],
      'sigma.csv:2: sigma_t_m is "1 km", expected a number of meters greater than 0',
    ],
    [
      'overflow',
      [',0,800,0.1,30,60,0,10,1e999,20,'],
      'sigma.csv:2: sigma_t_m is "1e999", expected a number of meters greater than 0',
    ],
    [
      'hexadecimal',
      [',0,0x10,0.1,30,60,0,10,1,20,'],
      'sigma.csv:2: perigee_max_km is "0x10", expected a number, or an empty cell for no bound',
    ],
    [
      'negative age',
      [',0,800,0.1,30,60,-1,10,1,20,'],
      'sigma.csv:2: age_d is "-1", expected a number of days, 0 or more',
    ],
    [
      'ages that fall',
      [',0,800,0.1,30,60,2,10,1,20,', ',0,800,0.1,30,60,1,10,1,20,'],
      'sigma.csv:3: age_d is 1, but line 2 of the same class has 2: put its rows in order of rising age',
    ],
    [
      'one age twice',
      ['5,,,,,,2,10,1,20,', '00005,,,,,,2,10,1,20,'],
      'sigma.csv:3: age_d is 2, but line 2 of the same object has 2: put its rows in order of rising age',
    ],
    [
      'empty class',
      [',800,800,0.1,30,60,0,10,1,20,'],
      'sigma.csv:2: perigee_min_km is 800 and perigee_max_km 800: no orbit lies between',
    ],
    [
      'inclinations the wrong way round',
      [',0,800,0.1,60,30,0,10,1,20,'],
      'sigma.csv:2: inclination_min_deg is 60 and inclination_max_deg 30: no orbit lies between',
    ],
    [
      'eccentricity of 0',
      [',0,800,0,30,60,0,10,1,20,'],
      'sigma.csv:2: eccentricity_max is 0, expected a number greater than 0: no orbit is below it',
    ],
    [
      'designator',
      ['SAT-1,,,,,,0,10,1,20,'],
      'sigma.csv:2: object_designator is "SAT-1", expected a catalog number of up to nine digits or in Alpha-5, or a designator of a launch batch such as B-NAME, or an empty cell for a class of orbits',
    ],
    [
      'samples',
      [',0,800,0.1,30,60,0,10,1,20,1.5'],
      'sigma.csv:2: samples is "1.5", expected a whole number of 0 or more, or an empty cell',
    ],
    ['short row', [good, ',0,800,0.1'], 'sigma.csv:3: 4 cells, expected 11 as in the header'],
    ['no rows', [], 'sigma.csv has no rows: give at least one, or leave the table out'],
    [
      'open quotes',
      ['"5,,,,,,0,10,1,20,'],
      'sigma.csv:2: not readable as CSV: Quote Not Closed: the parsing is finished with an opening quote at line 2',
    ],
  ])('refuses %s', (_, rows, message) => {
    expect(() => read(...rows)).toThrow(new InputError(message));
  });

  it.each([
    ['', `x.csv is empty: give a header line with the columns ${SIGMA_COLUMNS.join(',')}`],
    [`${HEADER},sigma\n`, `x.csv:1: unknown column "sigma": the columns are ${SIGMA_COLUMNS.join(',')}`],
    [`${HEADER},age_d\n`, 'x.csv:1: the column age_d is there twice: take one away'],
    [HEADER.replace('age_d,', ''), 'x.csv:1: column age_d is missing: add it to the header'],
  ])('refuses the header of %j', (text, message) => {
    expect(() => readSigmaTable(text, 'x.csv')).toThrow(new InputError(message));
  });
});

describe('sigmaAt', () => {
  const curve = sigmaCurve(
    [
      { ageDays: 1, sigmaRtnM: [10, 100, 50] },
      { ageDays: 3, sigmaRtnM: [20, 500, 60] },
      { ageDays: 7, sigmaRtnM: [40, 1700, 40] },
    ],
    false,
    'test',
  );

  it('keeps the first figures before the first age', () => {
    expect(sigmaAt(curve, 0)).toEqual([10, 100, 50]);
    expect(sigmaAt(curve, 1)).toEqual([10, 100, 50]);
  });

  it('goes straight from knot to knot', () => {
    expect(sigmaAt(curve, 2)).toEqual([15, 300, 55]);
    expect(sigmaAt(curve, 3)).toEqual([20, 500, 60]);
    expect(sigmaAt(curve, 4)).toEqual([25, 800, 55]);
    expect(sigmaAt(curve, 7)).toEqual([40, 1700, 40]);
  });

  it('carries the last slope on, but not a falling one', () => {
    expect(sigmaAt(curve, 17)).toEqual([90, 4700, 40]);
    expect(isBeyond(curve, 7)).toBe(false);
    expect(isBeyond(curve, 7.001)).toBe(true);
    expect(isBeyond(curve, -8)).toBe(true);
  });

  it('takes an epoch after the time as the same age before it', () => {
    for (const age of [0.5, 2, 5, 20]) expect(sigmaAt(curve, -age)).toEqual(sigmaAt(curve, age));
  });

  it('is constant with a single knot', () => {
    const single = sigmaCurve([{ ageDays: 2, sigmaRtnM: [1, 2, 3] }], false, 'test');
    for (const age of [0, 2, 50]) expect(sigmaAt(single, age)).toEqual([1, 2, 3]);
  });

  it('refuses an age that is no number', () => {
    expect(() => sigmaAt(curve, Number.NaN)).toThrow('ageDays must be a finite number, got NaN');
  });
});

describe('covarianceRtnM2', () => {
  it('squares on the diagonal', () => {
    expect(covarianceRtnM2([2, 3, 4])).toEqual([
      [4, 0, 0],
      [0, 9, 0],
      [0, 0, 16],
    ]);
  });
});
