import { sgp4 } from 'satellite.js';
import { Rejection } from './rejection.js';
import { type MeanElements, roundedSgp4RecordOf } from './sgp4-record.js';

/** Above it an orbit lies inside the Earth: 17.04 revolutions a day is one with a radius of 6378 km. */
const MAX_MEAN_MOTION_REV_PER_DAY = 18;
const FIRST_EPOCH_MS = Date.UTC(1957, 0, 1);
/** The calendar inside satellite.js takes every fourth year for a leap year. */
const END_OF_EPOCHS_MS = Date.UTC(2100, 0, 1);

/** Error codes of SGP4, after Vallado, Crawford, Hujsak, Kelso, AIAA 2006-6753. */
const SGP4_ERRORS: ReadonlyMap<number, string> = new Map([
  [1, 'mean eccentricity out of range'],
  [2, 'mean motion below zero'],
  [3, 'perturbed eccentricity out of range'],
  [4, 'semi-latus rectum below zero'],
  [6, "position below the Earth's surface"],
]);

/** An SGP4 error in words, with its code. */
export function sgp4ErrorText(code: number): string {
  return `SGP4 error ${code} (${SGP4_ERRORS.get(code) ?? 'no such error is known'})`;
}

/**
 * Checks that elements can be what they claim to be: every value in its range, and SGP4 yields a state at
 * the epoch. An object that decays later passes.
 *
 * @throws Rejection naming the first value that fails, and what is expected
 */
export function verifyElements(set: MeanElements): void {
  if (!(set.epochMs >= FIRST_EPOCH_MS && set.epochMs < END_OF_EPOCHS_MS)) {
    throw new Rejection('epoch is not in the years 1957 to 2099');
  }
  expectRange('inclination', set.inclinationDeg, 180, 'deg');
  expectRange('right ascension of the ascending node', set.rightAscensionDeg, 360, 'deg');
  if (!(set.eccentricity >= 0 && set.eccentricity < 1)) {
    throw new Rejection(`eccentricity ${set.eccentricity}, expected 0 to less than 1`);
  }
  expectRange('argument of perigee', set.argumentOfPerigeeDeg, 360, 'deg');
  expectRange('mean anomaly', set.meanAnomalyDeg, 360, 'deg');
  if (!(set.meanMotionRevPerDay > 0 && set.meanMotionRevPerDay < MAX_MEAN_MOTION_REV_PER_DAY)) {
    throw new Rejection(
      `mean motion ${set.meanMotionRevPerDay} rev/day, expected more than 0 and less than ${MAX_MEAN_MOTION_REV_PER_DAY}`,
    );
  }
  if (!Number.isFinite(set.bstar)) throw new Rejection(`B* ${set.bstar}, expected a finite number`);
  const record = roundedSgp4RecordOf(set);
  const state = record.error === 0 ? sgp4(record, 0) : null;
  if (state === null) throw new Rejection(`${sgp4ErrorText(record.error)} at the epoch`);
  const { x, y, z } = state.position;
  if (!Number.isFinite(x + y + z)) throw new Rejection('SGP4 gives no finite position at the epoch');
}

function expectRange(name: string, value: number, max: number, unit: string): void {
  if (!(value >= 0 && value <= max)) throw new Rejection(`${name} ${value} ${unit}, expected 0 to ${max}`);
}
