import { rtnFrame } from '../ephemeris/rtn-frame.js';
import { cross, dot, type Matrix3, norm, rotate, scale, subtract, type Vector3 } from '../vector.js';
import { requireFinite, requireNotNegative, shown } from './arguments.js';
import { covarianceOutOf, requireCovariance, sumOf } from './covariance.js';
import { type EncounterPlane, encounterPlane } from './encounter-plane.js';
import { discProbability } from './foster.js';
import { peakProbability } from './maximum.js';

/** One object at, or within rounding of, the time of closest approach. */
export type EncounterObject = {
  /** Position, kilometers; inertial frame, the same for both objects. */
  readonly positionKm: Vector3;
  /** Velocity, kilometers per second; same frame. */
  readonly velocityKmPerS: Vector3;
  /** Position covariance in the RTN frame of this object (CCSDS 508.0-B-1), square meters. */
  readonly covarianceRtnM2: Matrix3;
};

export type Encounter = {
  readonly object1: EncounterObject;
  readonly object2: EncounterObject;
  /** Sum of the two objects' hard-body radii, meters. */
  readonly hardBodyRadiusM: number;
};

export type EncounterAssessment = {
  /** Distance between the two states as given, meters. */
  readonly missDistanceM: number;
  readonly relativeSpeedMPerS: number;
  /** Object 2 minus object 1 in the RTN frame of object 1, meters. */
  readonly relativePositionRtnM: Vector3;
  /** Inertial velocity of object 2 minus that of object 1, in RTN components of object 1. */
  readonly relativeVelocityRtnMPerS: Vector3;
  /** Two-dimensional probability; `undefined` where the encounter plane or a density in it is missing. */
  readonly collisionProbability: number | undefined;
  /** Largest probability over all common scales of the combined sigmas; `undefined` likewise. */
  readonly collisionProbabilityMax: number | undefined;
  /** Miss in the encounter plane in units of the combined one-sigma ellipse; `undefined` likewise. */
  readonly mahalanobisDistance: number | undefined;
};

/**
 * Assesses one encounter from the states and position covariances of both objects.
 *
 * Miss distance, relative position and relative speed are those of the states as given. The probability
 * (`fosterProbability`) projects along the relative velocity, so that states rounded or slightly off the
 * time of closest approach do not matter. The errors of the two objects are taken as independent. Where
 * the relative speed is 0 or the combined covariance is singular in the encounter plane (sigmas in a
 * ratio above a million count as that) there is no figure: `undefined`, never NaN.
 *
 * @throws RangeError with the argument's name and value: wrong shape, not finite, a state without an
 * orbital plane (so without RTN), covariance not symmetric or not positive semidefinite, negative radius
 */
export function assessEncounter(encounter: Encounter): EncounterAssessment {
  requireObject('object1', encounter.object1);
  requireObject('object2', encounter.object2);
  requireNotNegative('hardBodyRadiusM', encounter.hardBodyRadiusM);
  const {
    plane: _plane,
    sigmaAlongM: _sigma,
    peakSigmaScale: _scale,
    ...assessment
  } = assessInFull(encounter);
  return assessment;
}

/** What `assessEncounter` finds on the way and the other figures of a row are made from. */
export type FullAssessment = EncounterAssessment & {
  readonly plane: EncounterPlane | undefined;
  /** One-sigma of the combined position error along the relative velocity; NaN without one. */
  readonly sigmaAlongM: number;
  /** The common factor on the combined sigmas at which the probability is largest; see `maximumProbability`. */
  readonly peakSigmaScale: number | undefined;
};

/**
 * `assessEncounter` without the checks, for states and covariances that were computed, not given.
 *
 * @param withMaximum whether the largest probability over all scales of the sigmas is wanted
 */
export function assessInFull(
  { object1, object2, hardBodyRadiusM }: Encounter,
  withMaximum = true,
): FullAssessment {
  const frame1 = rtnFrame(object1.positionKm, object1.velocityKmPerS);
  const frame2 = rtnFrame(object2.positionKm, object2.velocityKmPerS);
  const positionM = scale(subtract(object2.positionKm, object1.positionKm), 1000);
  const velocityMPerS = scale(subtract(object2.velocityKmPerS, object1.velocityKmPerS), 1000);
  const covarianceM2 = sumOf(
    covarianceOutOf(frame1, object1.covarianceRtnM2),
    covarianceOutOf(frame2, object2.covarianceRtnM2),
  );
  const plane = encounterPlane(positionM, velocityMPerS, covarianceM2);
  const probability =
    plane && discProbability(plane.sigmaXM, plane.sigmaYM, plane.missXM, plane.missYM, hardBodyRadiusM);
  const maximum =
    withMaximum && plane !== undefined && probability !== undefined
      ? peakProbability(
          plane.sigmaXM,
          plane.sigmaYM,
          plane.missXM,
          plane.missYM,
          hardBodyRadiusM,
          probability,
        )
      : undefined;
  const speed = norm(velocityMPerS);
  return {
    missDistanceM: norm(positionM),
    relativeSpeedMPerS: speed,
    sigmaAlongM: Math.sqrt(Math.max(0, dot(velocityMPerS, rotate(covarianceM2, velocityMPerS)))) / speed,
    relativePositionRtnM: rotate(frame1, positionM),
    relativeVelocityRtnMPerS: rotate(frame1, velocityMPerS),
    collisionProbability: probability,
    collisionProbabilityMax: maximum?.probability,
    mahalanobisDistance: plane?.mahalanobisDistance,
    plane,
    peakSigmaScale: maximum?.sigmaScale,
  };
}

function requireObject(name: string, object: EncounterObject): void {
  if (typeof object !== 'object' || object === null) {
    throw new RangeError(`${name} must be an object with a state and a covariance, got ${shown(object)}`);
  }
  requireVector(`${name}.positionKm`, object.positionKm);
  requireVector(`${name}.velocityKmPerS`, object.velocityKmPerS);
  requireCovariance(`${name}.covarianceRtnM2`, object.covarianceRtnM2);
  const momentum = norm(cross(object.positionKm, object.velocityKmPerS));
  if (!(momentum > 0) || !Number.isFinite(momentum)) {
    throw new RangeError(
      `${name} has no orbital plane, hence no RTN frame: positionKm ${shown(object.positionKm)}, velocityKmPerS ${shown(object.velocityKmPerS)}`,
    );
  }
}

function requireVector(name: string, value: unknown): asserts value is Vector3 {
  if (!Array.isArray(value) || value.length !== 3) {
    throw new RangeError(`${name} must be three numbers, got ${shown(value)}`);
  }
  for (let i = 0; i < 3; i++) requireFinite(`${name}[${i}]`, value[i]);
}
