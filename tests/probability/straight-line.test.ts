import { describe, expect, it } from 'vitest';
import { assessEncounter } from '../../src/index.js';
import { assessInFull } from '../../src/probability/assess-encounter.js';
import { curvedPathProbability } from '../../src/probability/curved-path.js';
import { boundStraightLine, testStraightLine } from '../../src/probability/straight-line.js';
import { norm, scale, type Vector3 } from '../../src/vector.js';
import { logUniform, seeded } from './seeded.js';
import { encounterOf, TCA_MS } from './slow-encounters.js';

describe('testStraightLine', () => {
  it('passes only encounters whose two-dimensional probability is that along the curved path', () => {
    const random = seeded(5);
    let passed = 0;
    let failedRightly = 0;
    for (let i = 0; i < 300; i++) {
      const speed = logUniform(random, 0.5, 12_000);
      const heading = 2 * Math.PI * random();
      const climb = (random() - 0.5) * (speed < 500 ? 2 : 0.04);
      // Fast ones cross on a circle of velocities, slow ones come from anywhere.
      const half = Math.asin(Math.min(1, speed / 2 / 7546));
      const [t, n] = speed < 500 ? [Math.cos(heading), Math.sin(heading)] : [-Math.sin(half), Math.cos(half)];
      const direction: Vector3 = [Math.sin(climb), Math.cos(climb) * t, Math.cos(climb) * n];
      const sigmas = (): Vector3 => [
        logUniform(random, 20, 300),
        logUniform(random, 50, 3000),
        logUniform(random, 20, 300),
      ];
      const miss = logUniform(random, 10, 1000);
      const turn = 2 * Math.PI * random();
      // Perpendicular to the direction: radial-like and sideways.
      const up: Vector3 = [Math.cos(climb), -Math.sin(climb) * t, -Math.sin(climb) * n];
      const side: Vector3 = [0, n, -t];
      const offset = [0, 1, 2].map(
        (k) => miss * (Math.cos(turn) * up[k] + Math.sin(turn) * side[k]),
      ) as unknown as Vector3;
      const velocity = direction.map((x) => speed * x) as unknown as Vector3;
      const encounter = encounterOf(offset, velocity, sigmas(), sigmas(), logUniform(random, 5, 30), 15);
      const { object1, object2 } = encounter.statesAt(TCA_MS);
      const foster = assessEncounter({
        object1: { ...object1, covarianceRtnM2: encounter.covariance1RtnM2 },
        object2: { ...object2, covarianceRtnM2: encounter.covariance2RtnM2 },
        hardBodyRadiusM: encounter.hardBodyRadiusM,
      }).collisionProbability;
      if (foster === undefined || foster < 1e-9) continue;
      const { isStraight, deviationSigmas } = testStraightLine(encounter);
      const curved =
        isStraight || deviationSigmas > 2 ? curvedPathProbability(encounter)?.probability : undefined;
      if (curved === undefined) continue;
      const change = Math.abs(Math.log(foster / curved));
      if (isStraight) {
        passed++;
        if (change > 0.11) expect.fail(`speed ${speed}, miss ${miss}, ${foster} against ${curved}`);
      } else if (change > 0.2) failedRightly++;
    }
    expect(passed).toBeGreaterThan(100);
    expect(failedRightly).toBeGreaterThan(10);
  });

  it('goes by the length of the passage, not by the speed', () => {
    const slow = encounterOf([20, 0, 10], [0, 0, 50], [5, 10, 5], [5, 10, 5], 5, 5);
    expect(testStraightLine(slow).isStraight).toBe(true);
    const fast = encounterOf([20, 0, 10], [0, -66, 997], [300, 9000, 300], [300, 9000, 20_000], 5, 5);
    expect(testStraightLine(fast).isStraight).toBe(false);
  });

  it('finds the passage and the deviation that follow by hand', () => {
    // Overtaking along the orbit at 20 m/s: three of the combined transverse sigmas of 500 m, and the radius.
    const found = testStraightLine(
      encounterOf([10, 0, 0], [0, 20, 0], [100, 300, 100], [100, 400, 100], 20, 5),
    );
    expect(found.halfPassageS).toBeCloseTo((3 * 500 + 20) / 20, 6);
    // In the turning axes: Coriolis 2 n v, of which half is spent on the speed being faster than the circle;
    // at 76 s the exact solution of the Clohessy-Wiltshire equations is 2 v / n (1 - cos n t) radially, less
    // the n x of the axes on the way, and 3 n^2 x is negligible.
    const n = Math.sqrt(398_600.8 / 7000 ** 3);
    const t = found.halfPassageS;
    // Initial radial offset x0 = 10 m, initial rates in the axes: x' = n y0 - 0 = 0, y' = 20 - n x0.
    const rate = 20 - n * 10;
    const radial = 10 * (4 - 3 * Math.cos(n * t)) + (2 * rate * (1 - Math.cos(n * t))) / n;
    expect(found.deviationSigmas).toBeCloseTo((radial - 10) / Math.hypot(100, 100), 2);
  });

  it('fails where there is no encounter plane', () => {
    const still = encounterOf([10, 0, 0], [0, 0, 0], [100, 300, 100], [100, 400, 100], 20, 5);
    expect(testStraightLine(still)).toEqual({
      isStraight: false,
      halfPassageS: Number.POSITIVE_INFINITY,
      deviationSigmas: Number.POSITIVE_INFINITY,
      deviationAlong: Number.POSITIVE_INFINITY,
    });
  });

  it('fails for a pair that trails along one orbit, whose relative velocity is only its turning', () => {
    // 8 km apart along the orbit at 1.1e-3 rad/s: 8.8 m/s, radial, in inertial axes, and none in turning ones.
    const trailing = encounterOf([0, 8000, 0], [-8.8, 0, 0], [4000, 5000, 4000], [4000, 5000, 4000], 20, 600);
    expect(testStraightLine(trailing).isStraight).toBe(false);
  });
});

describe('boundStraightLine', () => {
  it('never lets pass what the test would not, and bounds the deviation closely', () => {
    const random = seeded(7);
    let passed = 0;
    let bounded = 0;
    let closely = 0;
    for (let i = 0; i < 2000; i++) {
      const part = () => random() - 0.5;
      const speed = logUniform(random, 1, 14_000);
      const heading: Vector3 = [0.2 * part(), part(), part()];
      const velocity = scale(heading, speed / norm(heading));
      const sigmas = (): Vector3 => [
        logUniform(random, 20, 2000),
        logUniform(random, 50, 20_000),
        logUniform(random, 20, 2000),
      ];
      const miss = logUniform(random, 10, 5000);
      const offset: Vector3 = [2 * miss * part(), 2 * miss * part(), 2 * miss * part()];
      const encounter = encounterOf(offset, velocity, sigmas(), sigmas(), 10, 5);
      const { object1, object2 } = encounter.statesAt(TCA_MS);
      const assessed = assessInFull({
        object1: { ...object1, covarianceRtnM2: encounter.covariance1RtnM2 },
        object2: { ...object2, covarianceRtnM2: encounter.covariance2RtnM2 },
        hardBodyRadiusM: encounter.hardBodyRadiusM,
      });
      const bound = boundStraightLine(encounter, assessed);
      const tested = testStraightLine(encounter);
      expect(bound.deviationSigmas).toBeGreaterThanOrEqual(tested.deviationSigmas);
      if (bound.deviationSigmas !== Number.POSITIVE_INFINITY) bounded++;
      if (bound.deviationSigmas < 3 * tested.deviationSigmas) closely++;
      if (!bound.isStraight) continue;
      passed++;
      expect(tested.isStraight).toBe(true);
    }
    expect(passed).toBeGreaterThan(100);
    expect(closely).toBeGreaterThan(0.5 * bounded);
  });

  it('takes in velocities that are not the rates of the positions', () => {
    const encounter = encounterOf([20, 0, 30], [0, -7000, 7500], [80, 200, 80], [80, 200, 80], 10, 5);
    const { object1, object2 } = encounter.statesAt(TCA_MS);
    const wrong = { ...object2, velocityKmPerS: scale(object2.velocityKmPerS, 1.2) };
    const statesAt = (timeMs: number) =>
      timeMs === TCA_MS ? { object1, object2: wrong } : encounter.statesAt(timeMs);
    const assessed = assessInFull({
      object1: { ...object1, covarianceRtnM2: encounter.covariance1RtnM2 },
      object2: { ...wrong, covarianceRtnM2: encounter.covariance2RtnM2 },
      hardBodyRadiusM: encounter.hardBodyRadiusM,
    });
    const tested = testStraightLine({ ...encounter, statesAt });
    const bound = boundStraightLine({ ...encounter, statesAt }, assessed);
    expect(tested.isStraight).toBe(false);
    expect(bound.isStraight).toBe(false);
    expect(bound.deviationSigmas).toBeGreaterThanOrEqual(tested.deviationSigmas);
  });
});
