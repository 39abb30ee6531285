import { recordStateAt } from '../ephemeris/record-states.js';
import { type PlacedRecord, recordNumber } from '../ephemeris/sgp4-records.js';
import { createShortArc } from '../ephemeris/short-arc.js';
import type { OrbitState } from '../ephemeris/state.js';
import type { EncounterObject, FullAssessment } from '../probability/assess-encounter.js';
import { curvedPathProbability } from '../probability/curved-path.js';
import type { PathEncounter, StatesAt } from '../probability/encounter-path.js';
import { boundStraightLine, testStraightLine } from '../probability/straight-line.js';
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

export type PathProbability = {
  readonly probability: number | undefined;
  readonly method: ProbabilityMethod;
  /** `undefined` where there is no encounter plane to ask it of, or the answer makes no difference. */
  readonly isStraight: boolean | undefined;
};

/** An object with its state at closest approach. */
export type PathSide = PlacedRecord & EncounterObject;

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
  const foster = (isStraight: boolean | undefined): PathProbability => ({
    probability: collisionProbability,
    method: 'FOSTER-1992',
    isStraight,
  });
  const isNegligible = (deviationSigmas: number): boolean => {
    const miss = plane.mahalanobisDistance;
    const nearest = Math.max(0, miss - deviationSigmas);
    const most = ROOM * collisionProbability * Math.exp((miss * miss - nearest * nearest) / 2);
    return most < NEGLIGIBLE_PROBABILITY;
  };
  try {
    // Most encounters are told by two states more, long before an arc of eighteen is worth its making.
    const bound = boundStraightLine(
      { statesAt: directly(object1, object2, tcaMs), tcaMs, hardBodyRadiusM },
      assessed,
    );
    if (bound.isStraight) return foster(true);
    if (isNegligible(bound.deviationSigmas)) return foster(undefined);
    const encounter = atClosest(object1, object2, tcaMs, hardBodyRadiusM);
    const { isStraight, halfPassageS, deviationSigmas } = testStraightLine(encounter);
    if (isStraight) return foster(true);
    if (isNegligible(deviationSigmas)) return foster(undefined);
    const quarterMs = 250 * Math.min(periodS(object1), periodS(object2));
    const reachMs = Math.min(quarterMs, Math.max(SHORTEST_MS, 1000 * PASSAGES * halfPassageS));
    const along = curvedPathProbability({
      ...encounter,
      fromMs: Math.max(fromMs, tcaMs - reachMs),
      toMs: Math.min(toMs, tcaMs + reachMs),
    });
    return along === undefined
      ? foster(isStraight)
      : { probability: along.probability, method: along.method, isStraight };
  } catch (error) {
    // SGP4 gives up on one of them beside the encounter: only the two-dimensional figure can be had.
    if (error instanceof NoState) return foster(false);
    throw error;
  }
}

class NoState extends Error {}

function found(state: OrbitState | undefined): OrbitState {
  if (state === undefined) throw new NoState();
  return state;
}

/** The encounter with states of short arcs, and nothing yet of the time around closest approach. */
function atClosest(
  object1: PathSide,
  object2: PathSide,
  tcaMs: number,
  hardBodyRadiusM: number,
): PathEncounter {
  const arc1 = createShortArc(object1.records, object1.place, tcaMs);
  const arc2 = createShortArc(object2.records, object2.place, tcaMs);
  return {
    statesAt: (timeMs) => ({ object1: found(arc1(timeMs)), object2: found(arc2(timeMs)) }),
    fromMs: tcaMs,
    tcaMs,
    toMs: tcaMs,
    covariance1RtnM2: object1.covarianceRtnM2,
    covariance2RtnM2: object2.covarianceRtnM2,
    hardBodyRadiusM,
  };
}

/** The states as given at closest approach, SGP4's at other times. */
function directly(object1: PathSide, object2: PathSide, tcaMs: number): StatesAt {
  const at = (side: PathSide, timeMs: number): OrbitState => {
    if (timeMs === tcaMs) return side;
    if (!recordStateAt(side.records, side.place, timeMs, scratch)) throw new NoState();
    return {
      positionKm: [scratch[0], scratch[1], scratch[2]],
      velocityKmPerS: [scratch[3], scratch[4], scratch[5]],
    };
  };
  return (timeMs) => ({ object1: at(object1, timeMs), object2: at(object2, timeMs) });
}

const scratch = new Float64Array(6);

function periodS(side: PathSide): number {
  return (120 * Math.PI) / recordNumber(side, 'no_unkozai');
}
