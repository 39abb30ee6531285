import { type SatRec, sgp4 } from 'satellite.js';
import type { ElementSet } from '../../src/elements/element-set.js';
import { sgp4RecordOf } from '../../src/elements/sgp4-record.js';
import type { OrbitState } from '../../src/ephemeris/state.js';
import { cross, dot, norm, scale, subtract, type Vector3 } from '../../src/vector.js';

/** WGS-72, as SGP4 uses it. */
const MU_KM3_PER_S2 = 398_600.8;
const EARTH_RADIUS_KM = 6378.135;
const J2 = 0.001082616;
const RADIANS = Math.PI / 180;
const REV_PER_DAY_TO_RAD_PER_MIN = (2 * Math.PI) / 1440;
/** Root of mu in Earth radii and minutes. */
const XKE = 60 * Math.sqrt(MU_KM3_PER_S2 / EARTH_RADIUS_KM ** 3);

/** TEME state of a set, `undefined` where SGP4 fails. */
export function stateAt(set: ElementSet, ms: number): OrbitState | undefined {
  return stateOf(sgp4RecordOf(set), (ms - set.epochMs) / 60_000);
}

function stateOf(record: SatRec, minutes: number): OrbitState | undefined {
  if (record.error !== 0) return undefined;
  const state = sgp4(record, minutes);
  if (state === null) return undefined;
  const { position: r, velocity: v } = state;
  return { positionKm: [r.x, r.y, r.z], velocityKmPerS: [v.x, v.y, v.z] };
}

/**
 * The same orbit with its mean elements at another epoch: SGP4's own secular terms carry them there, so both
 * sets fly alike but for second-order terms of drag.
 *
 * @returns `undefined` where SGP4 fails at the new epoch
 */
export function atEpoch(set: ElementSet, epochMs: number): ElementSet | undefined {
  const record = sgp4RecordOf(set);
  if (record.error !== 0) return undefined;
  const mean = sgp4(record, (epochMs - set.epochMs) / 60_000)?.meanElements;
  if (mean === undefined) return undefined;
  return {
    ...set,
    epochMs,
    meanMotionRevPerDay: kozaiMeanMotion(mean.nm, mean.em, mean.im) / REV_PER_DAY_TO_RAD_PER_MIN,
    eccentricity: Math.max(0, mean.em),
    inclinationDeg: mean.im / RADIANS,
    rightAscensionDeg: fullCircle(mean.Om / RADIANS),
    argumentOfPerigeeDeg: fullCircle(mean.om / RADIANS),
    meanAnomalyDeg: fullCircle(mean.mm / RADIANS),
  };
}

/**
 * The mean elements at `template.epochMs`, with the drag term and names of `template`, whose SGP4 state at
 * `ms` is `target`: Newton's method with differences for derivatives.
 *
 * @throws Error when it does not come within a millimeter
 */
export function setThrough(target: OrbitState, ms: number, template: ElementSet): ElementSet {
  const osculating = keplerElements(target);
  const there = corrected({ ...template, ...osculating, epochMs: ms }, target, ms);
  const moved = atEpoch(there, template.epochMs);
  if (moved === undefined) throw new Error(`${template.designator} fails between its epoch and its target`);
  return corrected(moved, target, ms);
}

const MAX_NEWTON_STEPS = 40;
const CLOSE_ENOUGH_KM = 1e-7;
/** Weighs kilometers a second against kilometers. */
const VELOCITY_WEIGHT_S = 1000;

function corrected(start: ElementSet, target: OrbitState, ms: number): ElementSet {
  let set = start;
  let residual = residualOf(set, target, ms);
  for (let step = 0; step < MAX_NEWTON_STEPS; step += 1) {
    if (Math.hypot(...residual) < CLOSE_ENOUGH_KM) return set;
    const center = regular(set);
    const columns = center.map((value, index) => {
      const change = 1e-7 * (index === 0 ? value : 1);
      const moved = fromRegular(
        center.map((x, k) => (k === index ? x + change : x)),
        set,
      );
      return residualOf(moved, target, ms).map((x, k) => (x - residual[k]) / change);
    });
    const rows = residual.map((_, k) => columns.map((column) => column[k]));
    const correction = solveLinear(
      rows,
      residual.map((x) => -x),
    );
    // Halved until it helps: far from the target a whole step may lead away from it.
    let fraction = 1;
    for (;;) {
      const next = fromRegular(
        center.map((x, k) => x + fraction * correction[k]),
        set,
      );
      const nextResidual = residualOf(next, target, ms);
      if (Math.hypot(...nextResidual) < Math.hypot(...residual)) {
        set = next;
        residual = nextResidual;
        break;
      }
      fraction /= 2;
      if (fraction < 1e-4) {
        if (Math.hypot(...residual) < 1e-6) return set;
        throw new Error(`${set.designator}: no mean elements lead to the target`);
      }
    }
  }
  if (Math.hypot(...residual) < 1e-6) return set;
  throw new Error(`${set.designator}: mean elements do not settle`);
}

function residualOf(set: ElementSet, target: OrbitState, ms: number): number[] {
  const state = stateAt(set, ms);
  if (state === undefined) return new Array(6).fill(1e9);
  return [
    ...subtract(state.positionKm, target.positionKm),
    ...scale(subtract(state.velocityKmPerS, target.velocityKmPerS), VELOCITY_WEIGHT_S),
  ];
}

/** Elements without the singularity of circular orbits: n, e cos w, e sin w, i, node, w + M (radians). */
function regular(set: ElementSet): number[] {
  const perigee = set.argumentOfPerigeeDeg * RADIANS;
  return [
    set.meanMotionRevPerDay,
    set.eccentricity * Math.cos(perigee),
    set.eccentricity * Math.sin(perigee),
    set.inclinationDeg * RADIANS,
    set.rightAscensionDeg * RADIANS,
    perigee + set.meanAnomalyDeg * RADIANS,
  ];
}

function fromRegular(values: readonly number[], set: ElementSet): ElementSet {
  if (values[3] < 0) {
    // Tilted through the equator: the other node is the ascending one now, half a turn away.
    const [meanMotion, x, y, inclination, node, longitude] = values;
    return fromRegular([meanMotion, -x, -y, -inclination, node + Math.PI, longitude - Math.PI], set);
  }
  const [meanMotion, x, y, inclination, node, longitude] = values;
  const perigee = Math.atan2(y, x);
  return {
    ...set,
    meanMotionRevPerDay: meanMotion,
    eccentricity: Math.hypot(x, y),
    inclinationDeg: inclination / RADIANS,
    rightAscensionDeg: fullCircle(node / RADIANS),
    argumentOfPerigeeDeg: fullCircle(perigee / RADIANS),
    meanAnomalyDeg: fullCircle((longitude - perigee) / RADIANS),
  };
}

/** Moves an orbit by small changes of its regular elements, radians but for the mean motion's share. */
export function shifted(
  set: ElementSet,
  change: {
    readonly meanMotionShare: number;
    readonly eccentricityX: number;
    readonly eccentricityY: number;
    readonly inclinationRad: number;
    readonly nodeRad: number;
    readonly longitudeRad: number;
  },
): ElementSet {
  const [n, x, y, i, node, longitude] = regular(set);
  return fromRegular(
    [
      n * (1 + change.meanMotionShare),
      x + change.eccentricityX,
      y + change.eccentricityY,
      i + change.inclinationRad,
      node + change.nodeRad,
      longitude + change.longitudeRad,
    ],
    set,
  );
}

/** Two-body elements of a state (Vallado, Fundamentals of Astrodynamics and Applications, algorithm 9). */
function keplerElements(
  state: OrbitState,
): Pick<
  ElementSet,
  | 'meanMotionRevPerDay'
  | 'eccentricity'
  | 'inclinationDeg'
  | 'rightAscensionDeg'
  | 'argumentOfPerigeeDeg'
  | 'meanAnomalyDeg'
> {
  const { positionKm: r, velocityKmPerS: v } = state;
  const radius = norm(r);
  const momentum = cross(r, v);
  const axis = 1 / (2 / radius - dot(v, v) / MU_KM3_PER_S2);
  const toPerigee = subtract(scale(cross(v, momentum), 1 / MU_KM3_PER_S2), scale(r, 1 / radius));
  const eccentricity = norm(toPerigee);
  const node = Math.atan2(momentum[0], -momentum[1]);
  const nodeAxis: Vector3 = [Math.cos(node), Math.sin(node), 0];
  const acrossNode = cross(scale(momentum, 1 / norm(momentum)), nodeAxis);
  const perigee = Math.atan2(dot(toPerigee, acrossNode), dot(toPerigee, nodeAxis));
  const trueAnomaly = Math.atan2(dot(r, acrossNode), dot(r, nodeAxis)) - perigee;
  const eccentricAnomaly =
    2 * Math.atan(Math.sqrt((1 - eccentricity) / (1 + eccentricity)) * Math.tan(trueAnomaly / 2));
  return {
    meanMotionRevPerDay: (86_400 / (2 * Math.PI)) * Math.sqrt(MU_KM3_PER_S2 / axis ** 3),
    eccentricity,
    inclinationDeg: Math.acos(momentum[2] / norm(momentum)) / RADIANS,
    rightAscensionDeg: fullCircle(node / RADIANS),
    argumentOfPerigeeDeg: fullCircle(perigee / RADIANS),
    meanAnomalyDeg: fullCircle((eccentricAnomaly - eccentricity * Math.sin(eccentricAnomaly)) / RADIANS),
  };
}

/** Undoes SGP4's first step from Kozai's to Brouwer's mean motion (Spacetrack Report 3); rad/min. */
function kozaiMeanMotion(brouwer: number, eccentricity: number, inclination: number): number {
  const d1 = (0.75 * J2 * (3 * Math.cos(inclination) ** 2 - 1)) / (1 - eccentricity ** 2) ** 1.5;
  let kozai = brouwer;
  for (let step = 0; step < 20; step += 1) {
    const axis = (XKE / kozai) ** (2 / 3);
    const first = d1 / axis ** 2;
    const better = axis * (1 - first ** 2 - first * (1 / 3 + (134 * first ** 2) / 81));
    kozai = brouwer * (1 + d1 / better ** 2);
  }
  return kozai;
}

/** Gaussian elimination with row exchange. */
export function solveLinear(matrix: readonly (readonly number[])[], right: readonly number[]): number[] {
  const size = right.length;
  const rows = matrix.map((row, k) => [...row, right[k]]);
  for (let column = 0; column < size; column += 1) {
    let pivot = column;
    for (let k = column + 1; k < size; k += 1) {
      if (Math.abs(rows[k][column]) > Math.abs(rows[pivot][column])) pivot = k;
    }
    [rows[column], rows[pivot]] = [rows[pivot], rows[column]];
    for (let k = column + 1; k < size; k += 1) {
      const factor = rows[k][column] / rows[column][column];
      for (let m = column; m <= size; m += 1) rows[k][m] -= factor * rows[column][m];
    }
  }
  const solution: number[] = new Array(size).fill(0);
  for (let k = size - 1; k >= 0; k -= 1) {
    let rest = rows[k][size];
    for (let m = k + 1; m < size; m += 1) rest -= rows[k][m] * solution[m];
    solution[k] = rest / rows[k][k];
  }
  return solution;
}

function fullCircle(degrees: number): number {
  return ((degrees % 360) + 360) % 360;
}
