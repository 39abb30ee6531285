import type { ElementSet } from '../../src/elements/element-set.js';
import type { Vector3 } from '../../src/vector.js';
import { semiMajorAxisKm } from './catalog.js';
import { shifted } from './mean-elements.js';
import type { Random } from './random.js';

/** WGS-72, as SGP4 uses it. */
const EARTH_RADIUS_KM = 6378.135;
const J2 = 0.001082616;

/**
 * One-sigma errors of near-circular elements, meters in RTN. The transverse error
 * grows by a wrong mean motion, the others keep (nearly) their size. Being Gaussian in the elements they are Gaussian in RTN.
 */
export type ErrorLaw = {
  readonly radialM: number;
  /** At epoch; at least twice the radial one, which swings along the orbit with double its size. */
  readonly transverseM: number;
  readonly transverseMPerDay: number;
  readonly normalM: number;
};

/**
 * What the law says at an age: independent causes add up by their squares. A wrong inclination also turns the
 * node at a wrong rate (J2: 3/2 n J2 (R/p)^2 cos i, Kozai 1959), which lets the normal error grow a little;
 * half of its square counts, because it shows in full at the node only.
 */
export function expectedSigmaRtnM(
  law: ErrorLaw,
  ageDays: number,
  orbit: Pick<ElementSet, 'meanMotionRevPerDay' | 'eccentricity' | 'inclinationDeg'>,
): Vector3 {
  const sine = Math.sin((orbit.inclinationDeg * Math.PI) / 180);
  const parameterKm = semiMajorAxisKm(orbit.meanMotionRevPerDay) * (1 - orbit.eccentricity ** 2);
  const radiansPerDay = orbit.meanMotionRevPerDay * 2 * Math.PI;
  const nodeRateChange = 1.5 * radiansPerDay * J2 * (EARTH_RADIUS_KM / parameterKm) ** 2 * sine;
  return [
    law.radialM,
    Math.hypot(law.transverseM, law.transverseMPerDay * ageDays),
    law.normalM * Math.sqrt(1 + (nodeRateChange * ageDays * sine) ** 2 / 2),
  ];
}

/** The set as a fit with such errors would publish it, not yet rounded. */
export function withErrors(set: ElementSet, law: ErrorLaw, random: Random): ElementSet {
  const offset = law.transverseM ** 2 - 4 * law.radialM ** 2;
  if (offset < 0) {
    throw new RangeError(`transverse error ${law.transverseM} m is below twice ${law.radialM} m`);
  }
  const axisM = semiMajorAxisKm(set.meanMotionRevPerDay) * 1000;
  const inclination = (set.inclinationDeg * Math.PI) / 180;
  const radiansPerDay = set.meanMotionRevPerDay * 2 * Math.PI;
  const nodeRad = random.normal(0, law.normalM / axisM) / Math.sin(inclination);
  return shifted(set, {
    meanMotionShare: random.normal(0, law.transverseMPerDay / axisM / radiansPerDay),
    eccentricityX: random.normal(0, law.radialM / axisM),
    eccentricityY: random.normal(0, law.radialM / axisM),
    inclinationRad: random.normal(0, law.normalM / axisM),
    nodeRad,
    // A turned node moves the satellite along its orbit too; taken back here.
    longitudeRad: random.normal(0, Math.sqrt(offset) / axisM) - nodeRad * Math.cos(inclination),
  });
}
