import type { RefinedObject } from '../encounters/refine.js';
import { createShortArc } from '../ephemeris/short-arc.js';
import type { OrbitState } from '../ephemeris/state.js';
import type { FullAssessment } from '../probability/assess-encounter.js';
import { curvedPathProbability } from '../probability/curved-path.js';
import type { PathEncounter } from '../probability/encounter-path.js';
import { testStraightLine } from '../probability/straight-line.js';
import { cross, dot, type Matrix3, norm } from '../vector.js';
import type { ProbabilityMethod } from './encounter-records.js';

/**
 * Below this a probability is as good as none (own choice), and the path is not followed: the two-dimensional
 * figure stays.
 */
const NEGLIGIBLE_PROBABILITY = 1e-10;
/** The two-dimensional figure at the nearest that a bent path may come, and room for all that is rough about it. */
const ROOM = 10;
/** The path is followed for this many passages to either side, at least a minute, at most a quarter of a period. */
const PASSAGES = 5;
const SHORTEST_MS = 60_000;
/** Part of the largest shift that `testStraightLine` lets pass, for the quick bound. */
const SURELY_STRAIGHT = 0.1;
const PASSAGE_SIGMAS = 3;

export type PathProbability = {
  readonly probability: number | undefined;
  readonly method: ProbabilityMethod;
  /** `undefined` where there is no encounter plane to ask it of, or the answer makes no difference. */
  readonly isStraight: boolean | undefined;
};

export type PathSide = RefinedObject & { readonly covarianceRtnM2: Matrix3; readonly state: OrbitState };

/**
 * The probability of an encounter by the method that its relative path asks for: Foster's where the path
 * is straight enough (`testStraightLine`), along the true path otherwise (`curvedPathProbability`).
 *
 * @param assessed of the same encounter
 * @param fromMs start of the time that counts: window, validity of both objects
 */
export function pathProbability(
  object1: PathSide,
  object2: PathSide,
  tcaMs: number,
  hardBodyRadiusM: number,
  assessed: FullAssessment,
  fromMs: number,
  toMs: number,
): PathProbability {
  const { plane, collisionProbability } = assessed;
  if (plane === undefined || collisionProbability === undefined) {
    return { probability: undefined, method: '', isStraight: undefined };
  }
  const foster = { probability: collisionProbability, method: 'FOSTER-1992' as const };
  if (isSurelyStraight(object1, object2, hardBodyRadiusM, assessed)) return { ...foster, isStraight: true };

  const arc1 = createShortArc(object1.record, object1.epochMs, tcaMs);
  const arc2 = createShortArc(object2.record, object2.epochMs, tcaMs);
  const statesAt = (timeMs: number) => {
    const state1 = arc1(timeMs);
    const state2 = arc2(timeMs);
    if (state1 === undefined || state2 === undefined) throw new NoState();
    return { object1: state1, object2: state2 };
  };
  const encounter: PathEncounter = {
    statesAt,
    fromMs: tcaMs,
    tcaMs,
    toMs: tcaMs,
    covariance1RtnM2: object1.covarianceRtnM2,
    covariance2RtnM2: object2.covarianceRtnM2,
    hardBodyRadiusM,
  };
  try {
    const { isStraight, halfPassageS, deviationSigmas } = testStraightLine(encounter);
    if (isStraight) return { ...foster, isStraight };
    const miss = plane.mahalanobisDistance;
    const nearest = Math.max(0, miss - deviationSigmas);
    const most = ROOM * collisionProbability * Math.exp((miss * miss - nearest * nearest) / 2);
    if (most < NEGLIGIBLE_PROBABILITY) return { ...foster, isStraight: undefined };
    const quarterMs = 250 * Math.min(periodS(object1), periodS(object2));
    const reachMs = Math.min(quarterMs, Math.max(SHORTEST_MS, 1000 * PASSAGES * halfPassageS));
    const along = curvedPathProbability({
      ...encounter,
      fromMs: Math.max(fromMs, tcaMs - reachMs),
      toMs: Math.min(toMs, tcaMs + reachMs),
    });
    return along === undefined
      ? { ...foster, isStraight }
      : { probability: along.probability, method: along.method, isStraight };
  } catch (error) {
    // SGP4 gives up on one of them beside the encounter: only the two-dimensional figure can be had.
    if (error instanceof NoState) return { ...foster, isStraight: false };
    throw error;
  }
}

class NoState extends Error {}

/**
 * A quick bound on what `testStraightLine` measures. In axes that turn with object 1 (rate n) the relative
 * acceleration is below 2 n v + 4 n^2 d, so that in the time t of half a passage the path leaves the straight
 * line by less than (n v + 2 n^2 d) t^2, d the largest distance in that time; half as much again is added for
 * eccentric orbits. The smallest sigma of the encounter plane turns it into sigmas, and v t into a
 * part of the way along.
 */
function isSurelyStraight(
  object1: PathSide,
  object2: PathSide,
  hardBodyRadiusM: number,
  { plane, missDistanceM, relativeSpeedMPerS: speed }: FullAssessment,
): boolean {
  if (plane === undefined) return false;
  const trace = (m: Matrix3) => m[0][0] + m[1][1] + m[2][2];
  const sigmaM = Math.sqrt(trace(object1.covarianceRtnM2) + trace(object2.covarianceRtnM2));
  const { positionKm, velocityKmPerS } = object1.state;
  const rate = norm(cross(positionKm, velocityKmPerS)) / dot(positionKm, positionKm);
  const t = (PASSAGE_SIGMAS * sigmaM + hardBodyRadiusM) / speed;
  const distanceM = missDistanceM + speed * t;
  const deviationM = 1.5 * (rate * speed + 2 * rate * rate * distanceM) * t * t;
  return (
    (deviationM / plane.sigmaYM) * Math.max(1, plane.mahalanobisDistance) < SURELY_STRAIGHT &&
    deviationM < SURELY_STRAIGHT * speed * t
  );
}

function periodS({ record }: PathSide): number {
  return (120 * Math.PI) / record.no;
}
