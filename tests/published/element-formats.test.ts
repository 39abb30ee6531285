import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { describe, expect, it } from 'vitest';
import { readElementFiles } from '../../src/elements/read.js';
import { elementsOf, readText } from '../elements/formats.js';

const pathOf = (name: string) => fileURLToPath(new URL(name, import.meta.url));

// Vallado, Crawford, Hujsak, Kelso, "Revisiting Spacetrack Report #3", AIAA 2006-6753.
describe('the verification element sets of AIAA 2006-6753', () => {
  const file = pathOf('sgp4-verification.tle');

  it('are read but for the three whose checksums the authors did not adapt when they changed elements', async () => {
    const { sets, rejected, files } = await readElementFiles([file]);
    expect(sets.length).toBe(30);
    expect(rejected.map((set) => [set.source.line, set.designator, set.detail])).toEqual([
      [100, '33333', 'line 1, column 69: checksum "4", expected 2'],
      [103, '33334', 'line 1, column 69: checksum "9", expected 6'],
      [106, '33335', 'line 1, column 69: checksum "0", expected 3'],
    ]);
    expect(files[0]).toMatchObject({ read: 33, rejected: 3 });
  });

  it('give the fields that stand in their columns', async () => {
    const { sets } = await readElementFiles([file]);
    expect(elementsOf(sets[0])).toEqual({
      designator: '5',
      name: '',
      internationalDesignator: '1958-002B',
      epochMs: Date.UTC(2000, 5, 27, 18, 50, 19) + 733.568,
      meanMotionRevPerDay: 10.82419157,
      eccentricity: 0.1859667,
      inclinationDeg: 34.2682,
      rightAscensionDeg: 348.7242,
      argumentOfPerigeeDeg: 331.7664,
      meanAnomalyDeg: 19.3264,
      bstar: 0.28098e-4,
    });
    const byNumber = new Map(sets.map((set) => [set.designator, set]));
    // No international designator, no ephemeris type.
    expect(byNumber.get('11801')).toMatchObject({ internationalDesignator: '', bstar: 0.014311 });
    expect(byNumber.get('21897')?.bstar).toBe(-0.13525e-3);
    expect(byNumber.get('29141')).toMatchObject({ internationalDesignator: '1985-108AA', bstar: 0.13519 });
    expect(byNumber.get('88888')?.epochMs).toBeCloseTo(Date.UTC(1980, 9, 1, 23, 41, 24) + 113.76, 3);
    expect(byNumber.get('20413')?.meanMotionRevPerDay).toBe(0.24690082);
  });

  it('have their epochs where the published states are dated', async () => {
    const { sets } = await readElementFiles([file]);
    const epochs = new Map(sets.map((set) => [set.designator, set.epochMs]));
    let dated = 0;
    let epochMs: number | undefined;
    for (const row of readFileSync(pathOf('sgp4-verification-output.txt'), 'utf8').split('\n')) {
      const columns = row.trim().split(/\s+/);
      if (columns[1] === 'xx') epochMs = epochs.get(columns[0]);
      const date = /\s(\d{4})\s+(\d+)\s+(\d+)\s+(\d+):\s*(\d+):\s*(\d+\.\d+)$/.exec(row.trimEnd());
      if (date === null || epochMs === undefined) continue;
      const [year, month, day, hour, minute, second] = date.slice(1).map(Number);
      const published = Date.UTC(year, month - 1, day, hour, minute) + second * 1000;
      // They are printed from a Julian date in double precision: 40 microseconds fine.
      expect(Math.abs(epochMs + Number(columns[0]) * 60_000 - published)).toBeLessThan(0.05);
      dated += 1;
    }
    expect(dated).toBeGreaterThan(500);
  });
});

// Public element sets of 9 and 10 February 2009, the last before the accidental collision of 10 February.
it('plus signs, leading zeros and blanks in the sets of the 2009 collision are read', async () => {
  const { sets, rejected } = await readText(
    [
      '1 24946U 97051C   09040.78448243 +.00000153 +00000-0 +47668-4 0  9994',
      '2 24946 086.3994 121.7028 0002288 085.1644 274.9812 14.34219863597336',
      '1 22675U 93036A   09040.49834364 -.00000001  00000-0  95251-5 0  9996',
      '2 22675 074.0355 019.4646 0016027 098.7014 261.5952 14.31135643817415',
    ].join('\n'),
  );
  expect(rejected).toEqual([]);
  expect(sets).toMatchObject([
    {
      designator: '24946',
      internationalDesignator: '1997-051C',
      inclinationDeg: 86.3994,
      rightAscensionDeg: 121.7028,
      eccentricity: 0.0002288,
      argumentOfPerigeeDeg: 85.1644,
      meanAnomalyDeg: 274.9812,
      meanMotionRevPerDay: 14.34219863,
      bstar: 0.47668e-4,
    },
    { designator: '22675', inclinationDeg: 74.0355, rightAscensionDeg: 19.4646, bstar: 0.95251e-5 },
  ]);
  expect(sets[0].epochMs).toBeCloseTo(Date.UTC(2009, 1, 9) + 0.78448243 * 86_400_000, 3);
});

// CCSDS 502.0-B-3, Orbit Data Messages, annex G, figures G-7 to G-10.
describe('the OMM examples of CCSDS 502.0-B-3', () => {
  it.each([
    ['omm_g7.kvn', 'GOES 9'],
    ['omm_g8.kvn', 'GOES 9'],
    ['omm_g9.kvn', 'GOES 9'],
    ['omm_g10.xml', 'GOES-9'],
  ])('%s', async (name, objectName) => {
    const { sets, rejected } = await readElementFiles([pathOf(`ccsds-502.0-B-3/${name}`)]);
    expect(rejected).toEqual([]);
    expect(sets.map(elementsOf)).toEqual([
      {
        designator: '23581',
        name: objectName,
        internationalDesignator: '1995-025A',
        // 2020-064T10:34:41.4264: day 64 of 2020 is 4 March.
        epochMs: Date.UTC(2020, 2, 4, 10, 34, 41) + 426.4,
        meanMotionRevPerDay: 1.00273272,
        eccentricity: 0.0005013,
        inclinationDeg: 3.0539,
        rightAscensionDeg: 81.7939,
        argumentOfPerigeeDeg: 249.2363,
        meanAnomalyDeg: 150.1602,
        bstar: 0.0001,
      },
    ]);
  });
});
