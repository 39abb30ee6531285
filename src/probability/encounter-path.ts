import { rtnFrame } from '../ephemeris/rtn-frame.js';
import type { OrbitState } from '../ephemeris/state.js';
import { type Matrix3, rotate, scale, subtract, type Vector3 } from '../vector.js';
import { requireFinite, requireNotNegative } from './arguments.js';
import { covarianceOutOf, requireCovariance, sumOf } from './covariance.js';

/**
 * True states of both objects at one time, in one inertial frame (TEME); asked for up to half a second
 * outside of `fromMs` and `toMs`.
 */
export type StatesAt = (timeMs: number) => { readonly object1: OrbitState; readonly object2: OrbitState };

/**
 * An encounter along the true relative path. The position errors are taken as normal, independent between
 * the objects, and constant in the RTN frame of each object for the whole time: they turn with the orbits
 * as an error along the orbit does. No other velocity error than the one that this turning means.
 */
export type PathEncounter = {
  readonly statesAt: StatesAt;
  /** Start of the time that counts, milliseconds of UTC since 1970-01-01. */
  readonly fromMs: number;
  readonly tcaMs: number;
  /** End of the time that counts; both ends away from other encounters of the pair. */
  readonly toMs: number;
  /** Position covariance of object 1 in its own RTN, square meters. */
  readonly covariance1RtnM2: Matrix3;
  readonly covariance2RtnM2: Matrix3;
  /** Sum of the two objects' hard-body radii. */
  readonly hardBodyRadiusM: number;
};

/** @throws RangeError with name and value: times out of order, covariance or radius that is none */
export function requirePathEncounter(encounter: PathEncounter): void {
  requireFinite('fromMs', encounter.fromMs);
  requireFinite('tcaMs', encounter.tcaMs);
  requireFinite('toMs', encounter.toMs);
  if (!(encounter.fromMs <= encounter.tcaMs && encounter.tcaMs <= encounter.toMs)) {
    throw new RangeError(
      `fromMs, tcaMs and toMs must be in this order, got ${encounter.fromMs}, ${encounter.tcaMs}, ${encounter.toMs}`,
    );
  }
  requireCovariance('covariance1RtnM2', encounter.covariance1RtnM2);
  requireCovariance('covariance2RtnM2', encounter.covariance2RtnM2);
  requireNotNegative('hardBodyRadiusM', encounter.hardBodyRadiusM);
}

/** Object 2 minus object 1 in the axes of object 1's RTN, which turn with it. */
export type TurningState = {
  readonly positionM: Vector3;
  /** Rate of `positionM` in the turning axes: the inertial relative velocity less the turning. */
  readonly velocityMPerS: Vector3;
  /** Combined covariance in the same axes. */
  readonly covarianceM2: Matrix3;
};

/** Half the step of the difference that gives the rate; orbits hardly bend in it. */
const HALF_STEP_MS = 500;

/**
 * The relative state at a time. The rate comes from a difference of positions rather than from the
 * velocities: it then fits the path exactly, also where the velocities of a theory are not quite the
 * rates of its positions.
 */
export function turningStateAt(encounter: PathEncounter, timeMs: number): TurningState {
  const { object1, object2 } = encounter.statesAt(timeMs);
  const frame1 = rtnFrame(object1.positionKm, object1.velocityKmPerS);
  const before = turningPositionAt(encounter.statesAt, timeMs - HALF_STEP_MS);
  const after = turningPositionAt(encounter.statesAt, timeMs + HALF_STEP_MS);
  return {
    positionM: scale(rotate(frame1, subtract(object2.positionKm, object1.positionKm)), 1000),
    velocityMPerS: scale(subtract(after, before), 1000 / (2 * HALF_STEP_MS)),
    covarianceM2: combinedCovariance(encounter, frame1, object2),
  };
}

/** The covariance alone of `turningStateAt`. */
export function turningCovarianceAt(encounter: PathEncounter, timeMs: number): Matrix3 {
  const { object1, object2 } = encounter.statesAt(timeMs);
  return combinedCovariance(encounter, rtnFrame(object1.positionKm, object1.velocityKmPerS), object2);
}

function combinedCovariance(
  { covariance1RtnM2, covariance2RtnM2 }: PathEncounter,
  frame1: Matrix3,
  { positionKm, velocityKmPerS }: OrbitState,
): Matrix3 {
  const frame2 = rtnFrame(positionKm, velocityKmPerS);
  const frame2InFrame1: Matrix3 = [
    rotate(frame1, frame2[0]),
    rotate(frame1, frame2[1]),
    rotate(frame1, frame2[2]),
  ];
  return sumOf(covariance1RtnM2, covarianceOutOf(frame2InFrame1, covariance2RtnM2));
}

/** Object 2 minus object 1 in the axes of object 1's RTN, meters. */
export function turningPositionAt(statesAt: StatesAt, timeMs: number): Vector3 {
  const { object1, object2 } = statesAt(timeMs);
  const frame = rtnFrame(object1.positionKm, object1.velocityKmPerS);
  return scale(rotate(frame, subtract(object2.positionKm, object1.positionKm)), 1000);
}
