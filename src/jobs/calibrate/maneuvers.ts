import { medianOf, robustSpread } from '../../uncertainty/robust-spread.js';
import { JUMP_LAGS, JUMP_SIZE } from './set-differences.js';

/** Steps from one set to the next on either side that say how much such a step changes without a maneuver. */
const NEIGHBORS_PER_SIDE = 20;
/** With fewer, nothing is known about the usual change, and no maneuver is called. */
const MIN_NEIGHBORS = 8;
/** A change counts as a jump beyond so many robust sigmas of the neighbors'. */
const JUMP_SIGMAS = 6;
/** No sigma is taken to be smaller: sets that repeat themselves to the last digit would make a jump of any change. */
const SMALLEST_SIGMA_M = 0.5;
/** Takes the median of the length of a two-dimensional Gaussian vector to its sigma: 1 / sqrt(2 ln 2). */
const MEDIAN_LENGTH_TO_SIGMA = 1 / Math.sqrt(2 * Math.LN2);

/** A change of the orbit between two sets that all later pairs confirm. */
export type Maneuver = {
  /** Position of the last set before it; the next set is the first after it. */
  readonly before: number;
  /** Change of the mean semi-major axis, meters. */
  readonly semiMajorAxisChangeM: number;
  /** Largest displacement normal to the orbit that the change of the plane makes, meters. */
  readonly planeChangeM: number;
};

/**
 * Finds where an orbit changed by more than its elements scatter.
 *
 * Between sets k and k+1 lies a maneuver when the mean semi-major axis, or the plane, jumps by more than six
 * robust sigmas of the neighboring steps, and every other pair that straddles the gap, (k, k+2), (k-1, k+1)
 * and (k-1, k+2), shows at least half of that jump in the same direction. A single bad set fails that: pairs
 * that leave it out see no jump. Hence nothing is called beside the first and the last set of all. A step
 * longer than usual is allowed proportionally more, since drag has had more time to be wrong.
 *
 * What it cannot tell from a maneuver: a magnetic storm that makes the orbit decay far faster than the sets
 * before it knew. What it cannot see: burns that change neither axis nor plane, or less than the scatter,
 * and thrust that never pauses.
 *
 * @param epochMs epochs, ascending
 * @param jumpsM as in `SetDifferences`
 */
export function findManeuvers(epochMs: Float64Array, jumpsM: Float64Array): Maneuver[] {
  const maneuvers: Maneuver[] = [];
  for (let gap = 1; gap + 2 < epochMs.length; gap++) {
    const inAxis = persists(gap, (older, newer) => axisJump(jumpsM, older, newer));
    const inPlane = persists(gap, (older, newer) => planeJumpAlong(jumpsM, gap, older, newer));
    // Most gaps end here, before anything is sorted.
    if (!inAxis && !inPlane) continue;
    const usual = usualStep(epochMs, jumpsM, gap);
    if (usual === undefined) continue;
    const allowed = JUMP_SIGMAS * Math.max(1, (epochMs[gap + 1] - epochMs[gap]) / usual.lengthMs);
    const semiMajorAxisChangeM = axisJump(jumpsM, gap, gap + 1);
    const planeChangeM = planeJumpAlong(jumpsM, gap, gap, gap + 1);
    if (
      (inAxis && Math.abs(semiMajorAxisChangeM - usual.axisMedianM) > allowed * usual.axisSigmaM) ||
      (inPlane && planeChangeM > allowed * usual.planeSigmaM)
    ) {
      maneuvers.push({ before: gap, semiMajorAxisChangeM, planeChangeM });
    }
  }
  return maneuvers;
}

/** Whether all pairs that straddle the gap show at least half of the jump across it, in its direction. */
function persists(gap: number, jump: (older: number, newer: number) => number): boolean {
  const half = jump(gap, gap + 1) / 2;
  const shows = (older: number, newer: number) => jump(older, newer) * Math.sign(half) >= Math.abs(half);
  return shows(gap, gap + 2) && shows(gap - 1, gap + 1) && shows(gap - 1, gap + 2);
}

/** How far one step changes the orbit without a maneuver, from those around the gap; the gap and the steps beside it are left out. */
function usualStep(epochMs: Float64Array, jumpsM: Float64Array, gap: number) {
  const from = Math.max(0, gap - NEIGHBORS_PER_SIDE);
  const to = Math.min(epochMs.length - 2, gap + NEIGHBORS_PER_SIDE);
  const steps: number[] = [];
  for (let k = from; k <= to; k++) {
    if (Math.abs(k - gap) > 1 && !Number.isNaN(axisJump(jumpsM, k, k + 1))) steps.push(k);
  }
  if (steps.length < MIN_NEIGHBORS) return undefined;
  const axis = robustSpread(Float64Array.from(steps, (k) => axisJump(jumpsM, k, k + 1)));
  const planeLengthM = medianOf(Float64Array.from(steps, (k) => planeJumpAlong(jumpsM, k, k, k + 1)));
  return {
    axisMedianM: axis.median,
    axisSigmaM: Math.max(axis.sigma, SMALLEST_SIGMA_M),
    planeSigmaM: Math.max(planeLengthM * MEDIAN_LENGTH_TO_SIGMA, SMALLEST_SIGMA_M),
    lengthMs: medianOf(Float64Array.from(steps, (k) => epochMs[k + 1] - epochMs[k])),
  };
}

function axisJump(jumpsM: Float64Array, older: number, newer: number): number {
  return jumpsM[offsetOf(older, newer)];
}

/** The change of the plane from `older` to `newer`, along that across the gap. */
function planeJumpAlong(jumpsM: Float64Array, gap: number, older: number, newer: number): number {
  const at = offsetOf(older, newer) + 1;
  const along = offsetOf(gap, gap + 1) + 1;
  const length = Math.hypot(jumpsM[along], jumpsM[along + 1], jumpsM[along + 2]);
  if (length === 0) return 0;
  return (
    (jumpsM[at] * jumpsM[along] + jumpsM[at + 1] * jumpsM[along + 1] + jumpsM[at + 2] * jumpsM[along + 2]) /
    length
  );
}

function offsetOf(older: number, newer: number): number {
  return (older * JUMP_LAGS + newer - older - 1) * JUMP_SIZE;
}

/** Numbers the sets by the stretches between maneuvers, from 0. */
export function stretchesBetween(maneuvers: readonly Maneuver[], setCount: number): Uint32Array {
  const stretches = new Uint32Array(setCount);
  let next = 0;
  for (let set = 0; set < setCount; set++) {
    stretches[set] = next;
    if (maneuvers[next]?.before === set) next++;
  }
  return stretches;
}
