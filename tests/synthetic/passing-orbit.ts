import type { ElementSet } from '../../src/elements/element-set.js';
import { rtnFrame } from '../../src/ephemeris/rtn-frame.js';
import type { OrbitState } from '../../src/ephemeris/state.js';
import { cross, dot, norm, rotateBack, scale, subtract, type Vector3 } from '../../src/vector.js';
import { setThrough, stateAt } from './mean-elements.js';
import { roundToTwoLine } from './two-line.js';

/** WGS-72, as SGP4 uses it. */
const MU_KM3_PER_S2 = 398_600.8;
const RADIANS = Math.PI / 180;

/** How one object is to pass another. */
export type Passing = {
  readonly tcaMs: number;
  readonly missM: number;
  /** Direction of the miss about the relative velocity; 0 has it as far up as it can be, 90 to the side. */
  readonly missAngleDeg: number;
  /** From the one's velocity to the other's, turned about the vertical. */
  readonly crossingDeg: number;
  /** Semi-major axis of the passing orbit; the height of the meeting, circular, where it is left out. */
  readonly semiMajorAxisKm?: number;
  /** How steeply it climbs at the meeting. Default 0. */
  readonly climbDeg?: number;
};

/** The state that an object must have at TCA to pass `state` as told. */
export function passingState(state: OrbitState, passing: Passing): OrbitState {
  const radius = norm(state.positionKm);
  const axisKm = passing.semiMajorAxisKm ?? radius;
  const speed = Math.sqrt(MU_KM3_PER_S2 * (2 / radius - 1 / axisKm));
  const climb = (passing.climbDeg ?? 0) * RADIANS;
  const turn = passing.crossingDeg * RADIANS;
  const frame = rtnFrame(state.positionKm, state.velocityKmPerS);
  const velocityKmPerS = rotateBack(frame, [
    speed * Math.sin(climb),
    speed * Math.cos(climb) * Math.cos(turn),
    speed * Math.cos(climb) * Math.sin(turn),
  ]);
  const relative = subtract(velocityKmPerS, state.velocityKmPerS);
  const along = scale(relative, 1 / norm(relative));
  const up = subtract(frame[0], scale(along, dot(frame[0], along)));
  const first = scale(up, 1 / norm(up));
  const second = cross(along, first);
  const angle = passing.missAngleDeg * RADIANS;
  const missKm = passing.missM / 1000;
  return {
    positionKm: [0, 1, 2].map(
      (k) => state.positionKm[k] + missKm * (Math.cos(angle) * first[k] + Math.sin(angle) * second[k]),
    ) as unknown as Vector3,
    velocityKmPerS,
  };
}

/**
 * Elements, rounded to two lines, of an object that passes `of` as told; epoch, drag term and names are those
 * of `template`. Rounding moves it by some meters.
 */
export function setPassing(of: ElementSet, passing: Passing, template: ElementSet): ElementSet {
  const state = stateAt(of, passing.tcaMs);
  if (state === undefined) throw new Error(`${of.designator} fails before the meeting`);
  const target = passingState(state, passing);
  return roundedThrough(setThrough(target, passing.tcaMs, template), target, passing.tcaMs);
}

/**
 * The rounded neighbor that comes nearest to the target. Four decimals of a degree are 12 m, so node and
 * inclination are tried up and down; along the orbit the eight decimals of the mean motion make up for the
 * rest.
 */
function roundedThrough(set: ElementSet, target: OrbitState, ms: number): ElementSet {
  const days = (ms - set.epochMs) / 86_400_000;
  const missKm = (candidate: ElementSet) =>
    norm(subtract(stateAt(candidate, ms)?.positionKm ?? [1e9, 0, 0], target.positionKm));
  let best = roundToTwoLine(set);
  for (const inclination of [-1, 0, 1]) {
    for (const node of [-1, 0, 1]) {
      let candidate = roundToTwoLine({
        ...set,
        inclinationDeg: set.inclinationDeg + inclination * 1e-4,
        rightAscensionDeg: set.rightAscensionDeg + node * 1e-4,
      });
      const state = stateAt(candidate, ms);
      if (state === undefined) continue;
      const speed = norm(target.velocityKmPerS);
      const lateS = dot(subtract(target.positionKm, state.positionKm), target.velocityKmPerS) / speed ** 2;
      const share = lateS / 86_400 / days;
      candidate = roundToTwoLine({
        ...candidate,
        meanMotionRevPerDay: candidate.meanMotionRevPerDay * (1 + share),
      });
      if (missKm(candidate) < missKm(best)) best = candidate;
    }
  }
  return best;
}
