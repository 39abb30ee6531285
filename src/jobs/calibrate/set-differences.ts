import { orbitOf } from '../../elements/orbit.js';
import { roundedSgp4RecordOf } from '../../elements/sgp4-record.js';
import { rtnFrame } from '../../ephemeris/rtn-frame.js';
import { AGE_KNOTS_DAYS, knotWindow } from '../../uncertainty/calibrate-age-knots.js';
import { rotate, type Vector3 } from '../../vector.js';
import { MEAN_STATE_SIZE, meanStateAt } from './mean-state.js';
import { orbitClassOf } from './orbit-classes.js';
import { elementsAt, epochMsAt, type SetRecords } from './set-records.js';

const MS_PER_MINUTE = 60_000;
const MS_PER_DAY = 86_400_000;
const M_PER_KM = 1000;
const KNOTS = AGE_KNOTS_DAYS.length;
const WINDOWS = AGE_KNOTS_DAYS.map((_, knot) => knotWindow(knot));

/** A set is compared with the next, the one after and the third to find maneuvers. */
export const JUMP_LAGS = 3;
/** Values in a jump: change of the mean semi-major axis and three of the plane, meters. */
export const JUMP_SIZE = 4;

/** What propagating each set of one object to later ones showed. */
export type SetDifferences = {
  /** Sets for which SGP4 gives a state at their epoch, by epoch, as indices into the records. */
  readonly sets: readonly number[];
  /** Sets for which it gives none. */
  readonly rejected: readonly number[];
  readonly epochMs: Float64Array;
  /** Index of the orbit class, -1 for none. */
  readonly orbitClasses: Int16Array;
  /** At [set x knots + knot]: position in `sets` of the newer set, -1 where there is none. */
  readonly newer: Int32Array;
  /** At [(set x knots + knot) x 3]: older minus newer in RTN of the newer, meters. */
  readonly rtnM: Float64Array;
  /** Pairs lost because SGP4 gave up on the older set before the epoch of the newer one. */
  readonly failedPairs: number;
  /**
   * At [(set x JUMP_LAGS + lag - 1) x JUMP_SIZE]: by how much the set `lag` places later lies above this one
   * carried to its epoch: mean semi-major axis, and unit normal of the mean plane times that axis (TEME),
   * meters. NaN where there is no such set.
   */
  readonly jumpsM: Float64Array;
};

/**
 * Propagates every set of an object to the epochs of later ones and takes the differences there (pairwise
 * differencing: Osweiler, "Covariance Estimation and Autocorrelation of NORAD Two-Line Element Sets", AFIT
 * thesis, 2006). For each age knot a set is paired with one newer set, that with the age nearest to the knot:
 * every set then counts alike, however often the object is published.
 *
 * @param sets indices into `records`, by epoch
 */
export function setDifferences(records: SetRecords, sets: readonly number[]): SetDifferences {
  const count = sets.length;
  const epochMs = new Float64Array(count);
  const orbitClasses = new Int16Array(count);
  const states = new Float64Array(count * MEAN_STATE_SIZE);
  const newer = new Int32Array(count * KNOTS).fill(-1);
  const rtnM = new Float64Array(count * KNOTS * 3);
  const jumpsM = new Float64Array(count * JUMP_LAGS * JUMP_SIZE).fill(Number.NaN);
  const carried = new Float64Array(MEAN_STATE_SIZE);
  const valid: number[] = [];
  const rejected: number[] = [];
  let failedPairs = 0;

  // From the last to the first, so that the states of newer sets are there; sets that fail leave no hole.
  let first = count;
  for (let i = count - 1; i >= 0; i--) {
    const ownEpochMs = epochMsAt(records, sets[i]);
    const elements = elementsAt(records, sets[i]);
    const record = roundedSgp4RecordOf(elements);
    if (record.error !== 0 || !meanStateAt(record, 0, states, (first - 1) * MEAN_STATE_SIZE)) {
      rejected.push(sets[i]);
      continue;
    }
    first--;
    epochMs[first] = ownEpochMs;
    orbitClasses[first] = orbitClassOf(orbitOf(elements, record));
    valid.push(sets[i]);
    const carryTo = (other: number) =>
      meanStateAt(record, (epochMs[other] - ownEpochMs) / MS_PER_MINUTE, carried, 0);
    for (let lag = 1; lag <= JUMP_LAGS && first + lag < count; lag++) {
      if (!carryTo(first + lag)) continue;
      writeJump(carried, states, first + lag, jumpsM, (first * JUMP_LAGS + lag - 1) * JUMP_SIZE);
    }
    for (let knot = 0; knot < KNOTS; knot++) {
      const partner = nearestInWindow(epochMs, first, knot);
      if (partner < 0) continue;
      if (!carryTo(partner)) {
        failedPairs++;
        continue;
      }
      newer[first * KNOTS + knot] = partner;
      writeDifference(carried, states, partner, rtnM, (first * KNOTS + knot) * 3);
    }
  }
  return {
    sets: valid.reverse(),
    rejected: rejected.reverse(),
    epochMs: epochMs.subarray(first),
    orbitClasses: orbitClasses.subarray(first),
    newer: newer.subarray(first * KNOTS).map((partner) => (partner < 0 ? -1 : partner - first)),
    rtnM: rtnM.subarray(first * KNOTS * 3),
    failedPairs,
    jumpsM: jumpsM.subarray(first * JUMP_LAGS * JUMP_SIZE),
  };
}

/** The later set whose age difference is nearest to the knot, -1 when none lies in its window. */
function nearestInWindow(epochMs: Float64Array, older: number, knot: number): number {
  const { fromDays, toDays } = WINDOWS[knot];
  const targetMs = epochMs[older] + AGE_KNOTS_DAYS[knot] * MS_PER_DAY;
  let low = older + 1;
  let high = epochMs.length;
  while (low < high) {
    const middle = (low + high) >> 1;
    if (epochMs[middle] < targetMs) low = middle + 1;
    else high = middle;
  }
  const before = low - 1;
  let nearest = low;
  if (low === epochMs.length || (before > older && targetMs - epochMs[before] <= epochMs[low] - targetMs)) {
    nearest = before;
  }
  if (nearest <= older) return -1;
  const ageDays = (epochMs[nearest] - epochMs[older]) / MS_PER_DAY;
  return ageDays >= fromDays && ageDays < toDays ? nearest : -1;
}

function writeDifference(
  carried: Float64Array,
  states: Float64Array,
  newer: number,
  out: Float64Array,
  offset: number,
): void {
  const at = newer * MEAN_STATE_SIZE;
  const position: Vector3 = [states[at], states[at + 1], states[at + 2]];
  const frame = rtnFrame(position, [states[at + 3], states[at + 4], states[at + 5]]);
  const rtnKm = rotate(frame, [carried[0] - position[0], carried[1] - position[1], carried[2] - position[2]]);
  for (let axis = 0; axis < 3; axis++) out[offset + axis] = rtnKm[axis] * M_PER_KM;
}

function writeJump(
  carried: Float64Array,
  states: Float64Array,
  newer: number,
  out: Float64Array,
  offset: number,
): void {
  const at = newer * MEAN_STATE_SIZE;
  const semiMajorAxisM = states[at + 6] * M_PER_KM;
  out[offset] = semiMajorAxisM - carried[6] * M_PER_KM;
  for (let i = 0; i < 3; i++) out[offset + 1 + i] = (states[at + 7 + i] - carried[7 + i]) * semiMajorAxisM;
}
