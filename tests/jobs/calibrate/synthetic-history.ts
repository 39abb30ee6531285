import type { ElementSet } from '../../../src/elements/element-set.js';
import { sgp4RecordOf } from '../../../src/elements/sgp4-record.js';
import { semiMajorAxisKm } from '../../synthetic/catalog.js';
import { type ErrorLaw, withErrors } from '../../synthetic/element-errors.js';
import { seededRandom } from '../../synthetic/random.js';

const MS_PER_DAY = 86_400_000;
const MS_PER_MINUTE = 60_000;
const DEGREES = 180 / Math.PI;

/** A change of the orbit on a known day. */
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
  readonly law: ErrorLaw;
  readonly maneuvers?: readonly SyntheticManeuver[];
  readonly meanMotionRevPerDay: number;
  readonly inclinationDeg: number;
};

/**
 * Element sets of one object that flies an SGP4 orbit without drag, whose mean elements are linear in time:
 * without errors, all its sets agree to the last digit. The errors of each set are drawn afresh by the law.
 */
export function syntheticHistory(request: HistoryRequest): ElementSet[] {
  const random = seededRandom(request.seed);
  const maneuvers = [...(request.maneuvers ?? [])].sort((a, b) => a.day - b.day);
  let truth: ElementSet = {
    designator: String(request.designator),
    name: '',
    internationalDesignator: '',
    epochMs: request.startMs,
    meanMotionRevPerDay: request.meanMotionRevPerDay,
    eccentricity: 0.002,
    inclinationDeg: request.inclinationDeg,
    rightAscensionDeg: random.between(0, 360),
    argumentOfPerigeeDeg: random.between(0, 360),
    meanAnomalyDeg: random.between(0, 360),
    bstar: 0,
    source: { file: 'synthetic', line: 0, text: '' },
  };
  const sets: ElementSet[] = [];
  for (let day = random.between(0, 1 / request.setsPerDay); day < request.days; ) {
    for (let next = maneuvers[0]; next !== undefined && next.day <= day; next = maneuvers[0]) {
      truth = maneuvered(carriedTo(truth, request.startMs + next.day * MS_PER_DAY), next);
      maneuvers.shift();
    }
    const exact = carriedTo(truth, request.startMs + day * MS_PER_DAY);
    const source = { ...exact.source, line: 2 * sets.length + 1 };
    sets.push({ ...withErrors(exact, request.law, random), source });
    day += random.between(0.8, 1.2) / request.setsPerDay;
  }
  return sets;
}

function carriedTo(set: ElementSet, epochMs: number): ElementSet {
  const record = sgp4RecordOf(set);
  const degrees = (radiansPerMinute: number) =>
    radiansPerMinute * DEGREES * ((epochMs - set.epochMs) / MS_PER_MINUTE);
  return {
    ...set,
    epochMs,
    meanAnomalyDeg: turn(set.meanAnomalyDeg + degrees(record.mdot)),
    argumentOfPerigeeDeg: turn(set.argumentOfPerigeeDeg + degrees(record.argpdot)),
    rightAscensionDeg: turn(set.rightAscensionDeg + degrees(record.nodedot)),
  };
}

function maneuvered(set: ElementSet, { semiMajorAxisM, inclinationDeg = 0 }: SyntheticManeuver): ElementSet {
  const relative = semiMajorAxisM / 1000 / semiMajorAxisKm(set.meanMotionRevPerDay);
  return {
    ...set,
    meanMotionRevPerDay: set.meanMotionRevPerDay * (1 - 1.5 * relative),
    inclinationDeg: set.inclinationDeg + inclinationDeg,
  };
}

function turn(degrees: number): number {
  return ((degrees % 360) + 360) % 360;
}
