import { EARTH_MU_KM3_PER_S2 } from '../elements/orbit.js';
import { rtnFrame } from '../ephemeris/rtn-frame.js';
import { cross, dot, type Matrix3, norm, rotate, scale, subtract, type Vector3 } from '../vector.js';
import type { FullAssessment } from './assess-encounter.js';
import { covarianceOutOf, sumOf } from './covariance.js';
import { type PathEncounter, turningPositionAt } from './encounter-path.js';
import { encounterPlane } from './encounter-plane.js';

/** Half the passage reaches to this many sigmas of the combined error along the relative velocity. */
const PASSAGE_SIGMAS = 3;
/** Fractions of half the passage at which the path is compared with the straight line. */
const COMPARED_AT = [-1, -0.5, 0.5, 1] as const;
const LARGEST_SHIFT = 0.2;
/** Of the way along the relative velocity: the objects must go through the passage, not turn back in it. */
const LARGEST_PART_ALONG = 0.25;

/** The quick bound holds up to these; its margin is for what turning and gravity change in that time and space. */
const LONGEST_BOUNDED_S = 60;
const FARTHEST_BOUNDED_M = 200_000;
const MARGIN = 1.2;

export type StraightLineTest = {
  readonly isStraight: boolean;
  /** Time from closest approach to three sigmas along the path and the hard body, seconds. */
  readonly halfPassageS: number;
  /** Largest deviation from the straight line in that time, in sigmas of the encounter plane. */
  readonly deviationSigmas: number;
  /** Largest deviation along the line, as a part of the way that the relative velocity makes. */
  readonly deviationAlong: number;
};

/**
 * Tests whether the straight-line assumption of the two-dimensional probability holds.
 *
 * Along the relative velocity the objects may meet anywhere within a few sigmas s of the combined error and
 * the hard body R, so the passage that counts lasts t = (3 s + R) / v to either side of closest approach.
 * Meanwhile the two-dimensional method keeps relative velocity and covariance as they are at closest
 * approach. In truth the errors turn with the orbits (an error along the orbit stays one), and in the axes
 * that turn with object 1 the relative path bends away from the straight line: by about n v t^2 (n the
 * rate of the turning, Coriolis), besides the bend from the difference of gravity. Where the path is
 * displaced by w one-sigmas of the encounter plane, a Gaussian density at a miss of m sigmas changes by a
 * factor exp(m w) to first order. The assumption counts as good while the largest m w of the passage is up
 * to 0.2 (m at least 1). Displacements at one sigma along the path, where most of the probability is, are
 * some nine times smaller and partly cancel: over thousands of random encounters the two-dimensional
 * figure then stayed within a tenth of the one along the curved path, mostly within one in a hundred.
 *
 * Along the line the way made must agree with the relative velocity within a quarter. A pair that trails
 * along one orbit has a relative velocity only because its directions turn: in the axes that turn with it it
 * goes nowhere, and never passes through the covariance.
 *
 * There is no bare limit on the speed: 50 m/s may be fast with sigmas of 10 m and 1 km/s slow with sigmas
 * of 10 km.
 *
 * @returns not straight, with an infinite deviation, where there is no encounter plane
 */
export function testStraightLine(
  encounter: Pick<
    PathEncounter,
    'statesAt' | 'tcaMs' | 'covariance1RtnM2' | 'covariance2RtnM2' | 'hardBodyRadiusM'
  >,
): StraightLineTest {
  const { statesAt, tcaMs, hardBodyRadiusM } = encounter;
  const { object1, object2 } = statesAt(tcaMs);
  const frame1 = rtnFrame(object1.positionKm, object1.velocityKmPerS);
  const frame2 = rtnFrame(object2.positionKm, object2.velocityKmPerS);
  const frame2InFrame1: Matrix3 = [
    rotate(frame1, frame2[0]),
    rotate(frame1, frame2[1]),
    rotate(frame1, frame2[2]),
  ];
  const positionM = scale(rotate(frame1, subtract(object2.positionKm, object1.positionKm)), 1000);
  const velocityMPerS = scale(rotate(frame1, subtract(object2.velocityKmPerS, object1.velocityKmPerS)), 1000);
  const covarianceM2 = sumOf(
    encounter.covariance1RtnM2,
    covarianceOutOf(frame2InFrame1, encounter.covariance2RtnM2),
  );
  const plane = encounterPlane(positionM, velocityMPerS, covarianceM2);
  if (plane === undefined) {
    return {
      isStraight: false,
      halfPassageS: Number.POSITIVE_INFINITY,
      deviationSigmas: Number.POSITIVE_INFINITY,
      deviationAlong: Number.POSITIVE_INFINITY,
    };
  }
  const speed = norm(velocityMPerS);
  const sigmaAlongM = Math.sqrt(Math.max(0, dot(velocityMPerS, rotate(covarianceM2, velocityMPerS)))) / speed;
  const halfPassageS = (PASSAGE_SIGMAS * sigmaAlongM + hardBodyRadiusM) / speed;
  let deviationSigmas = 0;
  let deviationAlong = 0;
  for (const fraction of COMPARED_AT) {
    const seconds = fraction * halfPassageS;
    const truly = turningPositionAt(statesAt, tcaMs + 1000 * seconds);
    const straight: Vector3 = [
      positionM[0] + seconds * velocityMPerS[0],
      positionM[1] + seconds * velocityMPerS[1],
      positionM[2] + seconds * velocityMPerS[2],
    ];
    const shiftM = subtract(truly, straight);
    const deviation = encounterPlane(shiftM, velocityMPerS, covarianceM2);
    deviationAlong = Math.max(
      deviationAlong,
      Math.abs(dot(shiftM, velocityMPerS) / (speed * speed * seconds)),
    );
    deviationSigmas = Math.max(deviationSigmas, deviation?.mahalanobisDistance ?? Number.POSITIVE_INFINITY);
  }
  const isStraight =
    deviationSigmas * Math.max(1, plane.mahalanobisDistance) <= LARGEST_SHIFT &&
    deviationAlong <= LARGEST_PART_ALONG;
  return { isStraight, halfPassageS, deviationSigmas, deviationAlong };
}

/**
 * A quick bound on what `testStraightLine` measures, from the states at closest approach and at one more time.
 *
 * With w the relative velocity, T half the passage and D = miss + w T, the relative position in inertial axes
 * is r0 + w t + e(t), which in the axes that turn with object 1 is turned by at most n T, n the rate of its
 * turning. The shift from the straight line is thus up to n T D + |e|. What makes up e is the difference of
 * gravity, an acceleration of up to g = 2 mu D / r^3, and that the velocities of a theory are not quite the
 * rates of its positions, by some d: |e| <= d T + g T^2 / 2. A look at one end of the passage bounds d: there
 * |e(T)| >= d T - g T^2 / 2. So the shift is nowhere above n T D + g T^2 + |e(T)|.
 *
 * In a minute the rate of turning changes by up to 5 %, in it and over 200 km the gradient of gravity by up to
 * 18 %, flattening included, from low orbits to the most eccentric ones; the margin is for that.
 *
 * @param assessed the same encounter, as `assessInFull` does
 * @returns `isStraight` where the test is sure to pass; the largest deviation in sigmas, infinite where the bound
 * does not hold
 */
export function boundStraightLine(
  { statesAt, tcaMs, hardBodyRadiusM }: Pick<PathEncounter, 'statesAt' | 'tcaMs' | 'hardBodyRadiusM'>,
  { plane, sigmaAlongM, missDistanceM, relativeSpeedMPerS: speed }: FullAssessment,
): Pick<StraightLineTest, 'isStraight' | 'deviationSigmas'> {
  const seconds = (PASSAGE_SIGMAS * sigmaAlongM + hardBodyRadiusM) / speed;
  const reachM = missDistanceM + speed * seconds;
  if (plane === undefined || !(seconds <= LONGEST_BOUNDED_S && reachM <= FARTHEST_BOUNDED_M)) {
    return { isStraight: false, deviationSigmas: Number.POSITIVE_INFINITY };
  }
  const { object1, object2 } = statesAt(tcaMs);
  const later = statesAt(tcaMs + 1000 * seconds);
  const offLineM = (k: 0 | 1 | 2): number =>
    1000 *
    (later.object2.positionKm[k] -
      later.object1.positionKm[k] -
      (object2.positionKm[k] - object1.positionKm[k]) -
      seconds * (object2.velocityKmPerS[k] - object1.velocityKmPerS[k]));
  const { positionKm, velocityKmPerS } = object1;
  const squareKm2 = dot(positionKm, positionKm);
  const turning = (norm(cross(positionKm, velocityKmPerS)) / squareKm2) * seconds;
  const gradient = ((2 * EARTH_MU_KM3_PER_S2) / (squareKm2 * Math.sqrt(squareKm2))) * seconds * seconds;
  const shiftM = MARGIN * (turning + gradient) * reachM + Math.hypot(offLineM(0), offLineM(1), offLineM(2));
  const deviationSigmas = shiftM / plane.sigmaYM;
  return {
    isStraight:
      deviationSigmas * Math.max(1, plane.mahalanobisDistance) <= LARGEST_SHIFT &&
      shiftM <= LARGEST_PART_ALONG * speed * seconds,
    deviationSigmas,
  };
}
