import type { OrbitState } from '../ephemeris/state.js';
import type { Vector3 } from '../vector.js';

/** CCSDS 508 values of MANEUVERABLE. */
export type Maneuverable = 'YES' | 'NO' | 'N/A';

/** One side of an encounter as the tables and messages show it. */
export type ConjunctionObject = {
  readonly designator: string;
  readonly name: string;
  readonly internationalDesignator: string;
  readonly maneuverable: Maneuverable;
  /** Age of the element set at TCA, days; negative when its epoch lies after TCA. */
  readonly elementAgeDays: number;
  readonly elementEpochMs: number;
  /** The elements are a prediction of what is yet to fly, their age counts from its release. Default: no. */
  readonly isPredicted?: boolean;
  /** One-sigma at TCA in the object's own RTN, meters. */
  readonly sigmaRtnM: Vector3;
  /** TEME state at TCA. */
  readonly state: OrbitState;
};

/** One encounter with everything that a row of `conjunctions.csv` or a conjunction message says. */
export type Conjunction = {
  readonly tcaMs: number;
  readonly object1: ConjunctionObject;
  readonly object2: ConjunctionObject;
  readonly missDistanceM: number;
  readonly relativeSpeedMPerS: number;
  /** Object 2 minus object 1 in RTN of object 1. */
  readonly relativePositionRtnM: Vector3;
  readonly relativeVelocityRtnMPerS: Vector3;
  /** `undefined` where no figure can be given (singular covariance). */
  readonly collisionProbability: number | undefined;
  readonly collisionProbabilityMethod: string;
  readonly collisionProbabilityMax: number | undefined;
  /** Foster's figure, also where another method gives `collisionProbability`. */
  readonly collisionProbabilityFoster: number | undefined;
  readonly mahalanobisDistance: number | undefined;
  readonly hardBodyRadiusM: number;
  /** Total over all encounters of this pair in the window. */
  readonly pairProbability: number | undefined;
  /** When object 2 enters and leaves the screening volume; `undefined` where no volume was asked for. */
  readonly screenEntryMs: number | undefined;
  readonly screenExitMs: number | undefined;
  /** Short codes, explained in the README; why a figure should not be trusted, in a fixed order. */
  readonly remarks: readonly string[];
};
