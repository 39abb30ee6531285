import type { ElementSet } from '../../../src/elements/element-set.js';
import { sgp4RecordOf } from '../../../src/elements/sgp4-record.js';
import { type Random, seededRandom } from '../../synthetic/random.js';

const MS_PER_DAY = 86_400_000;
const MS_PER_MINUTE = 60_000;
const DEGREES = 180 / Math.PI;
const MU_KM3_PER_S2 = 398_600.8;

/** Errors of every set of a history, independent from set to set. */
export type SetErrors = {
  /** One-sigma of each component of the eccentricity vector times the semi-major axis, m. */
  readonly eccentricityM: number;
  /** One-sigma of the mean longitude times the semi-major axis, m. */
  readonly alongTrackM: number;
  /** One-sigma of the mean motion, m of along-track drift a day. */
  readonly driftMPerDay: number;
  /** One-sigma of each of the two tilts of the plane times the semi-major axis, m. */
  readonly planeM: number;
};

export type SyntheticManeuver = {
  readonly day: number;
  readonly semiMajorAxisM: number;
  readonly inclinationDeg?: number;
};

export type HistoryRequest = {
  readonly designator: number;
  readonly seed: number;
  readonly startMs: number;
  readonly days: number;
  readonly setsPerDay: number;
  readonly errors: SetErrors;
  readonly maneuvers?: readonly SyntheticManeuver[];
  readonly meanMotionRevPerDay: number;
  readonly inclinationDeg: number;
};

type Orbit = Pick<
  ElementSet,
  | 'epochMs'
  | 'meanMotionRevPerDay'
  | 'eccentricity'
  | 'inclinationDeg'
  | 'rightAscensionDeg'
  | 'argumentOfPerigeeDeg'
  | 'meanAnomalyDeg'
  | 'bstar'
>;

/**
 * Element sets of one object that flies an SGP4 orbit without drag, whose mean elements are linear in time,
 * each set off the truth by errors of a known law.
 */
export function syntheticHistory(request: HistoryRequest): ElementSet[] {
  const random = seededRandom(request.seed);
  const maneuvers = [...(request.maneuvers ?? [])].sort((a, b) => a.day - b.day);
  let truth: Orbit = {
    epochMs: request.startMs,
    meanMotionRevPerDay: request.meanMotionRevPerDay,
    eccentricity: 0.002,
    inclinationDeg: request.inclinationDeg,
    rightAscensionDeg: random.between(0, 360),
    argumentOfPerigeeDeg: random.between(0, 360),
    meanAnomalyDeg: random.between(0, 360),
    bstar: 0,
  };
  const sets: ElementSet[] = [];
  for (let day = random.between(0, 1 / request.setsPerDay); day < request.days; ) {
    const epochMs = request.startMs + day * MS_PER_DAY;
    for (let next = maneuvers[0]; next !== undefined && next.day <= day; next = maneuvers[0]) {
      truth = maneuvered(carriedTo(truth, request.startMs + next.day * MS_PER_DAY), next);
      maneuvers.shift();
    }
    sets.push({
      ...withErrors(carriedTo(truth, epochMs), request.errors, random),
      designator: String(request.designator),
      name: '',
      internationalDesignator: '',
      source: { file: 'synthetic', line: 2 * sets.length + 1, text: '' },
    });
    day += random.between(0.8, 1.2) / request.setsPerDay;
  }
  return sets;
}

/**
 * The law that the errors above follow at an age: one-sigma R T N of a single set, m. Linear theory for a
 * small eccentricity; a wrong inclination also lets the node drift, by 3/2 J2 (R/a)^2 n sin i a radian.
 */
export function knownSigmaRtnM(
  errors: SetErrors,
  ageDays: number,
  { meanMotionRevPerDay, inclinationDeg }: { meanMotionRevPerDay: number; inclinationDeg: number },
): [number, number, number] {
  const radiansPerDay = 2 * Math.PI * meanMotionRevPerDay;
  // A drift along the track comes with another semi-major axis: da = -2/3 a dn/n.
  const radialOfDrift = ((2 / 3) * errors.driftMPerDay) / radiansPerDay;
  const axisKm = semiMajorAxisOf({ meanMotionRevPerDay }) / 1000;
  const nodeDrift =
    1.5 *
    1.082_616e-3 *
    (6378.135 / axisKm) ** 2 *
    radiansPerDay *
    Math.sin(inclinationDeg / DEGREES) ** 2 *
    ageDays;
  return [
    Math.hypot(errors.eccentricityM, radialOfDrift),
    Math.hypot(errors.alongTrackM, 2 * errors.eccentricityM, errors.driftMPerDay * ageDays),
    errors.planeM * Math.sqrt(1 + nodeDrift ** 2 / 2),
  ];
}

function carriedTo(orbit: Orbit, epochMs: number): Orbit {
  const record = sgp4RecordOf(orbit);
  const degrees = (radiansPerMinute: number) =>
    radiansPerMinute * DEGREES * ((epochMs - orbit.epochMs) / MS_PER_MINUTE);
  return {
    ...orbit,
    epochMs,
    meanAnomalyDeg: turn(orbit.meanAnomalyDeg + degrees(record.mdot)),
    argumentOfPerigeeDeg: turn(orbit.argumentOfPerigeeDeg + degrees(record.argpdot)),
    rightAscensionDeg: turn(orbit.rightAscensionDeg + degrees(record.nodedot)),
  };
}

function maneuvered(orbit: Orbit, { semiMajorAxisM, inclinationDeg = 0 }: SyntheticManeuver): Orbit {
  const relative = semiMajorAxisM / semiMajorAxisOf(orbit);
  return {
    ...orbit,
    meanMotionRevPerDay: orbit.meanMotionRevPerDay * (1 - 1.5 * relative),
    inclinationDeg: orbit.inclinationDeg + inclinationDeg,
  };
}

function withErrors(orbit: Orbit, errors: SetErrors, random: Random): Orbit {
  const axisM = semiMajorAxisOf(orbit);
  const tilt = random.normal(0, errors.planeM / axisM);
  const turnOfNode = random.normal(0, errors.planeM / axisM) / Math.sin(orbit.inclinationDeg / DEGREES);
  const perigee = orbit.argumentOfPerigeeDeg / DEGREES;
  const x = orbit.eccentricity * Math.cos(perigee) + random.normal(0, errors.eccentricityM / axisM);
  const y = orbit.eccentricity * Math.sin(perigee) + random.normal(0, errors.eccentricityM / axisM);
  const alongTrack = random.normal(0, errors.alongTrackM / axisM);
  const argumentOfLatitude =
    perigee +
    orbit.meanAnomalyDeg / DEGREES +
    alongTrack -
    turnOfNode * Math.cos(orbit.inclinationDeg / DEGREES);
  const newPerigee = Math.atan2(y, x);
  return {
    ...orbit,
    meanMotionRevPerDay:
      orbit.meanMotionRevPerDay + random.normal(0, errors.driftMPerDay) / axisM / (2 * Math.PI),
    eccentricity: Math.hypot(x, y),
    inclinationDeg: orbit.inclinationDeg + tilt * DEGREES,
    rightAscensionDeg: turn(orbit.rightAscensionDeg + turnOfNode * DEGREES),
    argumentOfPerigeeDeg: turn(newPerigee * DEGREES),
    meanAnomalyDeg: turn((argumentOfLatitude - newPerigee) * DEGREES),
  };
}

function semiMajorAxisOf(orbit: Pick<Orbit, 'meanMotionRevPerDay'>): number {
  const radiansPerSecond = (orbit.meanMotionRevPerDay * 2 * Math.PI) / 86_400;
  return Math.cbrt(MU_KM3_PER_S2 / radiansPerSecond ** 2) * 1000;
}

function turn(degrees: number): number {
  return ((degrees % 360) + 360) % 360;
}
