import type { SatRec } from 'satellite.js';
import { type MeanElements, roundedSgp4RecordOf } from './sgp4-record.js';

/** Equatorial radius of WGS-72, the Earth of SGP4; heights are above this sphere. */
export const EARTH_RADIUS_KM = 6378.135;
/** WGS-72. */
export const EARTH_MU_KM3_PER_S2 = 398_600.8;
const SECONDS_PER_MINUTE = 60;

/** Size and shape of a mean orbit. */
export type OrbitSummary = {
  readonly semiMajorAxisKm: number;
  readonly eccentricity: number;
  /** Perigee radius less the equatorial radius of WGS-72. */
  readonly perigeeHeightKm: number;
  readonly apogeeHeightKm: number;
  readonly inclinationDeg: number;
  /** 2 pi over the Brouwer mean motion. */
  readonly periodS: number;
};

/**
 * The mean orbit as SGP4 sees it: from its own (Brouwer) mean motion, which differs from the published
 * (Kozai) one by up to 0.15 %. Osculating heights swing by some 10 to 20 km about these.
 *
 * @param record the SGP4 record of the set, if there is one already, or its Brouwer mean motion (radians a minute)
 */
export function orbitOf(
  set: MeanElements,
  record: Pick<SatRec, 'no'> = roundedSgp4RecordOf(set),
): OrbitSummary {
  const meanMotionRadPerS = record.no / SECONDS_PER_MINUTE;
  const semiMajorAxisKm = Math.cbrt(EARTH_MU_KM3_PER_S2 / meanMotionRadPerS ** 2);
  return {
    semiMajorAxisKm,
    eccentricity: set.eccentricity,
    perigeeHeightKm: semiMajorAxisKm * (1 - set.eccentricity) - EARTH_RADIUS_KM,
    apogeeHeightKm: semiMajorAxisKm * (1 + set.eccentricity) - EARTH_RADIUS_KM,
    inclinationDeg: set.inclinationDeg,
    periodS: (2 * Math.PI) / meanMotionRadPerS,
  };
}
