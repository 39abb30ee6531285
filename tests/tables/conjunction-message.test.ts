import { describe, expect, test } from 'vitest';
import { CAUTION } from '../../src/caution.js';
import { formatUtc } from '../../src/elements/utc.js';
import { EARTH_MU_KM3_PER_S2 } from '../../src/ephemeris/gravity.js';
import { rtnFrame } from '../../src/ephemeris/rtn-frame.js';
import type { OrbitState } from '../../src/ephemeris/state.js';
import { temeToEme2000 } from '../../src/ephemeris/teme-to-eme2000.js';
import {
  conjunctionMessageFileName,
  covarianceFromSigmas,
  formatConjunctionMessage,
} from '../../src/tables/conjunction-message.js';
import { COVARIANCE_KEYWORDS } from '../../src/tables/message-keywords.js';
import { readConjunctionMessage } from '../../src/tables/read-conjunction-message.js';
import { norm, rotate, scale, subtract, type Vector3 } from '../../src/vector.js';
import { EXAMPLE_TCA_MS, exampleConjunction, exampleObject, MESSAGE_RUN } from './example-conjunction.js';

const written = (changes = {}, run = MESSAGE_RUN) =>
  formatConjunctionMessage(exampleConjunction(changes), run);
const valuesOf = (text: string, keyword: string) =>
  [...text.matchAll(new RegExp(`^${keyword} *= (.*)$`, 'gm'))].map((match) => match[1]);

describe('a written message', () => {
  test('comes back as it was', () => {
    const conjunction = exampleConjunction({ remarks: ['stale-elements'] });
    const message = readConjunctionMessage(formatConjunctionMessage(conjunction, MESSAGE_RUN), 'a.kvn');
    expect(message).toMatchObject({
      creationMs: MESSAGE_RUN.creationMs,
      originator: 'LARKSPUR OPERATIONS',
      messageId: '20261202T031415926_799990001_799995002_20261201T060708009',
      tcaMs: Math.round(EXAMPLE_TCA_MS),
      missDistanceM: 715.748,
      relativeSpeedMPerS: 14_762.0854,
      relativePositionRtnM: [27.364, -93.746, 709.054],
      relativeVelocityRtnMPerS: [-7.1951, -14_693.1, -1426.25],
      collisionProbability: 1.234567e-5,
      collisionProbabilityMethod: 'FOSTER-1992',
    });
    for (const side of ['object1', 'object2'] as const) {
      const { state, covarianceRtn, ...rest } = message[side];
      const expected = temeToEme2000(conjunction[side].state, EXAMPLE_TCA_MS);
      expect(norm(subtract(state.positionKm, expected.positionKm))).toBeLessThan(1e-6);
      expect(norm(subtract(state.velocityKmPerS, expected.velocityKmPerS))).toBeLessThan(1e-9);
      for (const [axis, sigma] of conjunction[side].sigmaRtnM.entries())
        expect(Math.sqrt(covarianceRtn[axis][axis])).toBeCloseTo(sigma, 3);
      expect(rest).toMatchObject({
        designator: conjunction[side].designator,
        name: conjunction[side].name,
        internationalDesignator: conjunction[side].internationalDesignator || 'UNKNOWN',
        maneuverable: conjunction[side].maneuverable,
        frame: 'EME2000',
        covarianceMethod: 'DEFAULT',
        ephemerisName: 'NONE',
        catalogName: 'SATCAT',
      });
    }
    expect(message.comments[0]).toBe(CAUTION);
    expect(message.comments).toContain('Remarks: stale-elements');
    expect(message.comments).toContain('Hard-body radius, sum of both objects: 7.500 m');
  });

  test('has states whose distance is the miss distance', () => {
    const { object1, object2 } = readConjunctionMessage(written(), 'a.kvn');
    const frame = rtnFrame(object1.state.positionKm, object1.state.velocityKmPerS);
    const relative = scale(subtract(object2.state.positionKm, object1.state.positionKm), 1000);
    expect(norm(subtract(rotate(frame, relative), [27.364, -93.746, 709.054]))).toBeLessThan(0.003);
  });

  test('tells the screening: period, volume, entry and exit', () => {
    const text = written();
    expect(valuesOf(text, 'START_SCREEN_PERIOD')).toEqual(['2026-12-01T00:00:00.000']);
    expect(valuesOf(text, 'STOP_SCREEN_PERIOD')).toEqual(['2026-12-08T00:00:00.000']);
    expect(valuesOf(text, 'SCREEN_VOLUME_SHAPE')).toEqual(['BOX']);
    expect(valuesOf(text, 'SCREEN_VOLUME_X')).toEqual(['400.000 [m]']);
    expect(valuesOf(text, 'SCREEN_VOLUME_Z')).toEqual(['26000.000 [m]']);
    expect(valuesOf(text, 'SCREEN_ENTRY_TIME')).toEqual(['2026-12-02T03:14:15.586']);
    expect(valuesOf(text, 'SCREEN_EXIT_TIME')).toEqual(['2026-12-02T03:14:16.266']);
    const sphere = written(
      { screenEntryMs: undefined, screenExitMs: undefined },
      { ...MESSAGE_RUN, volume: { shape: 'SPHERE', missKm: 5 } },
    );
    expect(valuesOf(sphere, 'SCREEN_VOLUME_SHAPE')).toEqual(['ELLIPSOID']);
    expect(valuesOf(sphere, 'SCREEN_VOLUME_[XYZ]')).toEqual(['5000.000 [m]', '5000.000 [m]', '5000.000 [m]']);
    expect(sphere).not.toMatch('SCREEN_ENTRY');
  });

  test('leaves a probability out that is not there, and says so', () => {
    const text = written({ collisionProbability: undefined });
    expect(text).not.toMatch(/^COLLISION_PROBABILITY/m);
    expect(text).toContain('COMMENT No collision probability can be given.');
  });

  test('says where the velocity covariance comes from', () => {
    expect(written().match(/^COMMENT Velocity covariance: derived from the position sigmas/gm)).toHaveLength(
      2,
    );
  });

  test('has nothing but printable ASCII in lines of at most 254 characters, whatever the names', () => {
    const name = `鵲橋\r\nTCA = 2000-01-01T00:00:00\tGröße Ø ${'x'.repeat(400)}`;
    const text = written({
      object1: exampleObject({ name }),
      object2: exampleObject({ name: '\u001B[2J' }),
      remarks: Array.from({ length: 60 }, (_, i) => `remark-${i}`),
    });
    expect(text).toMatch(/^[ -~\n]+$/);
    for (const line of text.split('\n')) expect(line.length).toBeLessThanOrEqual(254);
    const message = readConjunctionMessage(text, 'a.kvn');
    expect(message.tcaMs).toBe(Math.round(EXAMPLE_TCA_MS));
    expect(message.object1.name).toMatch(/^\?\? TCA = 2000-01-01T00:00:00 Gro\?e \? xxx/);
    expect(message.object2.name).toBe('?[2J');
    expect(message.comments.filter((comment) => comment.includes('full name'))).toHaveLength(2);
    expect(message.comments.join(' ')).toContain('remark-59');
  });

  test('names what it does not know', () => {
    const text = written({ object1: exampleObject({ name: '', internationalDesignator: '' }) });
    expect(valuesOf(text, 'OBJECT_NAME')[0]).toBe('UNKNOWN');
    expect(valuesOf(text, 'INTERNATIONAL_DESIGNATOR')[0]).toBe('UNKNOWN');
    expect(text).not.toContain('full name');
  });

  test('refuses a figure that is none, by name', () => {
    expect(() => written({ missDistanceM: Number.NaN })).toThrow('MISS_DISTANCE is NaN');
    expect(() => written({ object1: exampleObject({ sigmaRtnM: [1, Number.NaN, 1] }) })).toThrow('NaN');
  });

  test('has a file name that sorts by time and tells the objects', () => {
    expect(conjunctionMessageFileName(exampleConjunction())).toBe(
      '20261202T031415926_799990001_799995002.kvn',
    );
    const odd = exampleConjunction({ object1: exampleObject({ designator: '../A b' }) });
    expect(conjunctionMessageFileName(odd)).toBe('20261202T031415926_---A-b_799995002.kvn');
  });

  test('repeats to the byte', () => {
    expect(written()).toBe(written());
    expect(written()).toContain(formatUtc(MESSAGE_RUN.creationMs).slice(0, -1));
  });
});

describe('the covariance from position sigmas', () => {
  /** Perigee of 7000 km, eccentricity 0.2, somewhere off both apses. */
  const eccentric: OrbitState = stateOnOrbit(8750, 0.2, 1.1);
  const matrixOf = (terms: readonly number[]) => {
    const matrix = Array.from({ length: 6 }, () => [0, 0, 0, 0, 0, 0]);
    for (const [i, { row, column }] of COVARIANCE_KEYWORDS.entries()) {
      matrix[row][column] = terms[i];
      matrix[column][row] = terms[i];
    }
    return matrix;
  };

  test('gives a late object the radial velocity error that gravity makes', () => {
    const covariance = matrixOf(covarianceFromSigmas([50, 1000, 80], eccentric));
    // A short way along the true orbit, seen in the frame of the first state.
    const dt = 1e-3;
    const late = twoBodyStep(eccentric, dt);
    const frame = rtnFrame(eccentric.positionKm, eccentric.velocityKmPerS);
    const position = rotate(frame, subtract(late.positionKm, eccentric.positionKm));
    const velocity = rotate(frame, subtract(late.velocityKmPerS, eccentric.velocityKmPerS));
    const ratio = velocity[0] / position[1];
    expect(ratio).toBeLessThan(0);
    expect(Math.sqrt(covariance[3][3] / covariance[1][1])).toBeCloseTo(-ratio, 8);
    expect(covariance[3][1] / covariance[1][1]).toBeCloseTo(0.99 * ratio, 8);
  });

  test('keeps the energy of an object that is too high, on a circle', () => {
    const circular = stateOnOrbit(7000, 0, 0.3);
    const covariance = matrixOf(covarianceFromSigmas([50, 1000, 80], circular));
    const slope = covariance[4][0] / covariance[0][0] / 0.99;
    const energy = (r: number, v: number) => (v * v) / 2 - EARTH_MU_KM3_PER_S2 / r;
    const v = norm(circular.velocityKmPerS);
    const up = 0.001;
    expect(energy(7000 + up, v + slope * up)).toBeCloseTo(energy(7000, v), 8);
    expect(energy(7000 + up, v)).not.toBeCloseTo(energy(7000, v), 8);
    expect(Math.sqrt(covariance[5][5]) / 80).toBeCloseTo(Math.sqrt(EARTH_MU_KM3_PER_S2 / 7000 ** 3), 12);
  });

  test('is positive definite as printed, over a wide range of sigmas and orbits', () => {
    for (const sigmaRtnM of [
      [1, 1, 1],
      [50, 1e5, 80],
      [4e4, 3, 7],
      [120.5, 900.25, 160.125],
    ] as const)
      for (const state of [eccentric, stateOnOrbit(6578, 0, 2), stateOnOrbit(42_164, 0.001, 4)]) {
        const printed = covarianceFromSigmas(sigmaRtnM, state).map((term) => Number(term.toExponential(6)));
        expect(smallestPivot(matrixOf(printed))).toBeGreaterThan(0);
      }
    expect(
      smallestPivot([
        [1, 2],
        [2, 1],
      ]),
    ).toBeLessThan(0);
  });
});

function stateOnOrbit(semiMajorAxisKm: number, eccentricity: number, trueAnomaly: number): OrbitState {
  const parameter = semiMajorAxisKm * (1 - eccentricity ** 2);
  const radius = parameter / (1 + eccentricity * Math.cos(trueAnomaly));
  const speed = Math.sqrt(EARTH_MU_KM3_PER_S2 / parameter);
  return {
    positionKm: [radius * Math.cos(trueAnomaly), radius * Math.sin(trueAnomaly), 0],
    velocityKmPerS: [-speed * Math.sin(trueAnomaly), speed * (eccentricity + Math.cos(trueAnomaly)), 0],
  };
}

function twoBodyStep({ positionKm, velocityKmPerS }: OrbitState, dt: number): OrbitState {
  const pull = -EARTH_MU_KM3_PER_S2 / norm(positionKm) ** 3;
  const add = (a: Vector3, b: Vector3): Vector3 => [a[0] + b[0], a[1] + b[1], a[2] + b[2]];
  const acceleration = scale(positionKm, pull);
  return {
    positionKm: add(positionKm, add(scale(velocityKmPerS, dt), scale(acceleration, (dt * dt) / 2))),
    velocityKmPerS: add(velocityKmPerS, scale(acceleration, dt)),
  };
}

/** Smallest diagonal term of the LDL factors, each against the diagonal it started from. */
function smallestPivot(matrix: readonly (readonly number[])[]): number {
  const a = matrix.map((row) => [...row]);
  let smallest = Number.POSITIVE_INFINITY;
  for (let k = 0; k < a.length; k++) {
    smallest = Math.min(smallest, a[k][k] / matrix[k][k]);
    for (let i = k + 1; i < a.length; i++)
      for (let j = k + 1; j < a.length; j++) a[i][j] -= (a[i][k] * a[k][j]) / a[k][k];
  }
  return smallest;
}
