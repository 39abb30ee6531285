import { sgp4 } from 'satellite.js';
import { expect, it } from 'vitest';
import { EARTH_RADIUS_KM, orbitOf } from '../../src/elements/orbit.js';
import { sgp4RecordOf } from '../../src/elements/sgp4-record.js';
import { inventedSet, inventedSets } from './formats.js';

it('a geostationary orbit is 35 786 km high (common knowledge: 42 164 km from the center)', () => {
  const set = inventedSet({ meanMotionRevPerDay: 1.00273791, eccentricity: 0.0001, inclinationDeg: 0.05 });
  const orbit = orbitOf(set);
  expect(orbit.semiMajorAxisKm).toBeCloseTo(42_164, -1);
  expect(orbit.periodS).toBeCloseTo(86_164, -1);
  expect(orbit.apogeeHeightKm - orbit.perigeeHeightKm).toBeCloseTo(2 * 0.0001 * orbit.semiMajorAxisKm, 6);
});

it('heights and axis agree with what SGP4 keeps in units of the Earth radius', () => {
  for (const set of inventedSets(30)) {
    const record = sgp4RecordOf(set);
    const orbit = orbitOf(set, record);
    expect(orbitOf(set)).toEqual(orbit);
    expect(orbit.semiMajorAxisKm).toBeCloseTo(record.a * EARTH_RADIUS_KM, 6);
    expect(orbit.perigeeHeightKm).toBeCloseTo(record.altp * EARTH_RADIUS_KM, 6);
    expect(orbit.apogeeHeightKm).toBeCloseTo(record.alta * EARTH_RADIUS_KM, 6);
    expect(orbit).toMatchObject({ eccentricity: set.eccentricity, inclinationDeg: set.inclinationDeg });
  }
});

it('radii over a revolution stay between perigee and apogee but for short-period terms of some 25 km', () => {
  for (const set of inventedSets(30)) {
    const record = sgp4RecordOf(set);
    const { perigeeHeightKm, apogeeHeightKm, periodS } = orbitOf(set, record);
    const heights = Array.from({ length: 721 }, (_, i) => {
      const state = sgp4(record, ((i / 720) * periodS) / 60);
      const { x, y, z } = state?.position ?? { x: 0, y: 0, z: 0 };
      return Math.hypot(x, y, z) - EARTH_RADIUS_KM;
    });
    expect(Math.abs(Math.min(...heights) - perigeeHeightKm)).toBeLessThan(25);
    expect(Math.abs(Math.max(...heights) - apogeeHeightKm)).toBeLessThan(25);
  }
});
