import { twoline2satrec } from 'satellite.js';
import { expect, test } from 'vitest';
import type { ElementSet } from '../../src/elements/element-set.js';
import { syntheticCatalog } from './catalog.js';
import { checksum, roundToTwoLine, toThreeLine, toTwoLine } from './two-line.js';

const START_MS = Date.UTC(2026, 11, 1);

test('what satellite.js reads from the two lines is what was written', () => {
  const sets = syntheticCatalog({ seed: 3, count: 3000, epochMs: START_MS });
  const degrees = 180 / Math.PI;
  for (const set of sets) {
    const [line1, line2] = toTwoLine(set);
    expect(line1).toMatch(/^1 [A-Z0-9]{5}U .{59}\d$/);
    expect(line2).toMatch(/^2 [A-Z0-9]{5} .{60}\d$/);
    const record = twoline2satrec(line1, line2);
    const epochMs = (record.jdsatepoch - 2_440_587.5) * 86_400_000;
    expect(Math.abs(epochMs - set.epochMs)).toBeLessThan(0.2);
    expect(record.inclo * degrees).toBeCloseTo(set.inclinationDeg, 9);
    expect(record.nodeo * degrees).toBeCloseTo(set.rightAscensionDeg, 9);
    expect(record.argpo * degrees).toBeCloseTo(set.argumentOfPerigeeDeg, 9);
    expect(record.mo * degrees).toBeCloseTo(set.meanAnomalyDeg, 9);
    expect(record.ecco).toBeCloseTo(set.eccentricity, 12);
    expect(record.bstar).toBeCloseTo(set.bstar, 14);
    expect(Number(line2.slice(52, 63))).toBe(set.meanMotionRevPerDay);
  }
});

test('a published set comes out in the published columns', () => {
  // AIAA 2006-6753, verification set 00005; derivatives, set and revolution numbers are not kept.
  const set: ElementSet = {
    designator: '5',
    name: '',
    internationalDesignator: '1958-002B',
    epochMs: Date.UTC(2000, 0, 1) + (179.78495062 - 1) * 86_400_000,
    meanMotionRevPerDay: 10.82419157,
    eccentricity: 0.1859667,
    inclinationDeg: 34.2682,
    rightAscensionDeg: 348.7242,
    argumentOfPerigeeDeg: 331.7664,
    meanAnomalyDeg: 19.3264,
    bstar: 0.28098e-4,
    source: { file: '', line: 1, text: '' },
  };
  const [line1, line2] = toTwoLine(set);
  expect(line1.slice(0, 33)).toBe('1 00005U 58002B   00179.78495062 ');
  expect(line1.slice(53, 64)).toBe(' 28098-4 0 ');
  expect(line2.slice(0, 63)).toBe('2 00005  34.2682 348.7242 1859667 331.7664  19.3264 10.82419157');
});

test('checksums agree with published lines', () => {
  // AIAA 2006-6753, verification sets 00005 and 28350.
  for (const line of [
    '1 00005U 58002B   00179.78495062  .00000023  00000-0  28098-4 0  4753',
    '2 00005  34.2682 348.7242 1859667 331.7664  19.3264 10.82419157413667',
    '1 28350U 04020A   06167.21788666  .16154492  76267-5  18678-3 0  8894',
  ]) {
    expect(checksum(line)).toBe(line[68]);
  }
});

test('Alpha-5 leaves out I and O', () => {
  const [set] = syntheticCatalog({ seed: 1, count: 1, epochMs: START_MS });
  const field = (designator: string) => toTwoLine({ ...set, designator })[0].slice(2, 7);
  // Examples on space-track.org, "Alpha-5" (from memory).
  expect(field('100000')).toBe('A0000');
  expect(field('148493')).toBe('E8493');
  expect(field('182931')).toBe('J2931');
  expect(field('234018')).toBe('P4018');
  expect(field('301928')).toBe('W1928');
  expect(field('339999')).toBe('Z9999');
  expect(field('99999')).toBe('99999');
  expect(() => field('340000')).toThrow('340000');
});

test('rounding carries over midnight, the year and the full circle', () => {
  const [set] = syntheticCatalog({ seed: 1, count: 1, epochMs: START_MS });
  const lines = toTwoLine({
    ...set,
    epochMs: Date.UTC(2027, 0, 1) - 0.1,
    rightAscensionDeg: 359.99996,
    meanAnomalyDeg: -0.00001,
    bstar: -0.9999996e-3,
    eccentricity: 0.12345678,
  });
  expect(lines[0].slice(18, 32)).toBe('27001.00000000');
  expect(lines[0].slice(53, 61)).toBe('-10000-2');
  expect(lines[1].slice(17, 25)).toBe('  0.0000');
  expect(lines[1].slice(26, 33)).toBe('1234568');
  expect(lines[1].slice(43, 51)).toBe('  0.0000');
  expect(() => toTwoLine({ ...set, eccentricity: 1 })).toThrow('eccentricity 1');
  expect(() => toTwoLine({ ...set, inclinationDeg: -0.01 })).toThrow('inclination -0.01');
});

test('rounding once is enough', () => {
  for (const set of syntheticCatalog({ seed: 4, count: 200, epochMs: START_MS })) {
    expect(roundToTwoLine(set)).toEqual(set);
  }
});

test('a name of up to 24 characters goes above the lines', () => {
  const [set] = syntheticCatalog({ seed: 1, count: 1, epochMs: START_MS });
  expect(toThreeLine({ ...set, name: 'EXAMPLE 1' })[0]).toBe('EXAMPLE 1');
  expect(() => toThreeLine({ ...set, name: 'A'.repeat(25) })).toThrow('no name');
});
