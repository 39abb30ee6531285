import { expect, test } from 'vitest';
import { parseUtc } from '../../src/elements/utc.js';
import { temeToEme2000 } from '../../src/ephemeris/teme-to-eme2000.js';
import { norm, subtract, type Vector3 } from '../../src/vector.js';

/**
 * Time, position and velocity in TEME, and in the mean equator and equinox of J2000 as ERFA 2.0.0 (the
 * library of the Astropy project derived from the IAU's SOFA) gives them: pnm80, all 106 terms of
 * nutation, and eqeq94, with the true leap seconds of each time.
 */
const FROM_ERFA: readonly (readonly [string, Vector3, Vector3, Vector3, Vector3])[] = [
  [
    '1998-07-14T03:04:05.000Z',
    [5094.1801621, 6127.6446595, 6380.3445327],
    [-4.746131487, 0.785818041, 5.531931288],
    [5091.1721755, 6129.0500978, 6381.3954376],
    [-4.7472522445, 0.7840278571, 5.5312235813],
  ],
  [
    '2004-04-06T07:51:28.386Z',
    [-3012.5, 5871.25, -2160.75],
    [-4.125, -4.5, -4.75],
    [-3007.7461921, 5874.0424282, -2159.7828064],
    [-4.1311419013, -4.4962338423, -4.7482283882],
  ],
  [
    '2012-02-29T12:00:00.000Z',
    [-37214.5, 19822.25, 310.5],
    [-1.4455, -2.7137, 0.0125],
    [-37160.0481353, 19923.3819853, 355.9331579],
    [-1.4528587262, -2.7097589152, 0.0142243881],
  ],
  [
    '2026-12-02T03:14:15.926Z',
    [6524.834, -2862.695, 1448.296],
    [4.901327, 5.533756, -1.976341],
    [6511.2743957, -2901.8820637, 1431.2333586],
    [4.9293282857, 5.5040987643, -1.9894735538],
  ],
  [
    '2033-06-01T00:00:00.000Z',
    [2570.097065, 2244.654904, 6281.497978],
    [4.418769571, 4.833547743, -3.526774282],
    [2607.2392396, 2225.0276083, 6273.1688244],
    [4.4432590322, 4.8005945523, -3.5409866223],
  ],
  [
    '2049-09-17T18:30:00.250Z',
    [42164.0, 0.0, 0.0],
    [0.0, 3.0747, 0.0],
    [42160.8960495, -468.772949, -204.9200494],
    [0.0341843086, 3.0745099646, -0.0000293752],
  ],
];

/**
 * Vallado, Fundamentals of Astrodynamics and Applications, 4th edition, example 3-15, from memory; no
 * corrections by the observed pole offsets.
 */
test('TEME to EME2000: the worked example of Vallado', () => {
  const position = temeToEme2000(
    { positionKm: [5094.1801621, 6127.6446595, 6380.3445327], velocityKmPerS: [0, 0, 0] },
    Date.UTC(2004, 3, 6, 7, 51, 28, 386),
  ).positionKm;
  expect(norm(subtract(position, [5102.5096, 6123.01152, 6378.1363])) * 1000).toBeLessThan(0.2);
});

test.each(FROM_ERFA)(
  'TEME to EME2000: ERFA at %s',
  (time, positionKm, velocityKmPerS, position, velocity) => {
    const turned = temeToEme2000({ positionKm, velocityKmPerS }, parseUtc(time)!);
    // 0.005", the terms of nutation left out.
    const tolerance = 0.005 * (Math.PI / 648_000);
    expect(norm(subtract(turned.positionKm, position))).toBeLessThan(tolerance * norm(position));
    expect(norm(subtract(turned.velocityKmPerS, velocity))).toBeLessThan(tolerance * norm(velocity));
  },
);
