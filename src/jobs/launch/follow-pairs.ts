import { tidePerS2 } from '../../encounters/bounds.js';
import type { PositionSamples } from '../../encounters/position-samples.js';
import { relativeStateAt } from '../../encounters/relative-state.js';
import { slowMinima } from '../../encounters/slow-minima.js';
import { recordStateAt } from '../../ephemeris/record-states.js';

/** A stretch of time in which an object flies on one set; milliseconds of UTC since 1970-01-01. */
type FollowedPhase = PositionSamples & {
  readonly fromMs: number;
  /** Exclusive; infinite where nothing ends it. */
  readonly toMs: number;
};

/** An object with its phases, none of which overlap. */
export type FollowedObject = { readonly phases: readonly FollowedPhase[] };

/** What became of one pair that was within the limit at some time; indices of the objects. */
export type FollowedPair = {
  readonly first: number;
  readonly second: number;
  readonly closestMs: number;
  readonly closestKm: number;
  readonly closestSpeedKmPerS: number;
  /** Smallest speed at the samples within the limit. */
  readonly slowestKmPerS: number;
  readonly lastInsideMs: number;
  /** Common time of the two, first and last moment. */
  readonly startMs: number;
  readonly endMs: number;
  readonly endKm: number;
  /** Their last stretch of common time on the same sets. */
  readonly lastStretch: {
    readonly first: FollowedPhase;
    readonly second: FollowedPhase;
    readonly fromMs: number;
    readonly toMs: number;
  };
};

const SAMPLE_MS = 60_000;
/** Step of the samples of a phase. */
export const REFINE_GRID_MS = 20_000;
const EDGE_PRECISION_MS = 1;
/** More than half the tide of the lowest orbit times the square of a minute, which is 0.005 of the distance. */
const TIDE_SLACK = 0.01;

/**
 * Follows the pairs of one deployment through the window. Objects that left one stage part slowly, so that
 * local minima of their distance come with each revolution and tell little: a pair has one row here, and the
 * smallest distance counts even where it lies at the edge of its time, as at release.
 *
 * States are sampled every minute. Between samples the pair moves on a straight line but for the tide, which
 * bends it by less than half the tide times distance times time squared; where that line comes below the
 * smallest distance so far, or into the limit from outside, the minima between are worked out.
 *
 * @param firstCount the first so many objects are followed with each other and with all the rest, the rest
 * not among themselves
 * @param isSkipped pairs that are not followed
 */
export function followPairs(
  objects: readonly FollowedObject[],
  firstCount: number,
  { startMs, endMs, limitKm }: { readonly startMs: number; readonly endMs: number; readonly limitKm: number },
  isSkipped: (first: number, second: number) => boolean = () => false,
): FollowedPair[] {
  const pairs: Pair[] = [];
  for (let i = 0; i < firstCount; i++) {
    for (let j = i + 1; j < objects.length; j++) if (!isSkipped(i, j)) pairs.push(newPair(i, j));
  }
  const failed = new Set<FollowedPhase>();
  for (const [fromMs, toMs] of stretches(objects, startMs, endMs)) {
    const active = objects.map(({ phases }) =>
      phases.find((phase) => phase.fromMs <= fromMs && phase.toMs >= toMs && !failed.has(phase)),
    );
    followStretch(active, failed, pairs, fromMs, toMs, limitKm);
  }
  return pairs.filter(({ lastInsideMs }) => lastInsideMs >= startMs).map((pair) => finished(pair, limitKm));
}

type Pair = {
  readonly first: number;
  readonly second: number;
  closestMs: number;
  closestKm: number;
  closestPhases: readonly [FollowedPhase, FollowedPhase] | undefined;
  slowestKmPerS: number;
  lastInsideMs: number;
  /** Where the pair leaves the limit, inside and outside by turns; bisected at the end. */
  exit: { readonly insideMs: number; readonly outsideMs: number } | undefined;
  exitPhases: readonly [FollowedPhase, FollowedPhase] | undefined;
  startMs: number;
  endMs: number;
  endKm: number;
  /** What the pair flies on, and since when. */
  phases: readonly [FollowedPhase, FollowedPhase] | undefined;
  phasesFromMs: number;
};

function newPair(first: number, second: number): Pair {
  return {
    first,
    second,
    closestMs: Number.NaN,
    closestKm: Number.POSITIVE_INFINITY,
    closestPhases: undefined,
    slowestKmPerS: Number.POSITIVE_INFINITY,
    lastInsideMs: Number.NEGATIVE_INFINITY,
    exit: undefined,
    exitPhases: undefined,
    startMs: Number.NaN,
    endMs: Number.NEGATIVE_INFINITY,
    endKm: Number.NaN,
    phases: undefined,
    phasesFromMs: Number.NaN,
  };
}

/** The window cut where any set begins or ends to hold: within a stretch nothing changes. */
function stretches(objects: readonly FollowedObject[], startMs: number, endMs: number): [number, number][] {
  const cuts = new Set([startMs, endMs]);
  for (const { phases } of objects) {
    for (const { fromMs, toMs } of phases) {
      for (const ms of [fromMs, toMs]) if (ms > startMs && ms < endMs) cuts.add(ms);
    }
  }
  const sorted = [...cuts].sort((a, b) => a - b);
  return sorted.slice(1).map((toMs, k) => [sorted[k], toMs]);
}

function followStretch(
  active: readonly (FollowedPhase | undefined)[],
  failed: Set<FollowedPhase>,
  pairs: readonly Pair[],
  fromMs: number,
  toMs: number,
  limitKm: number,
): void {
  const ours = pairs.filter(
    ({ first, second }) => active[first] !== undefined && active[second] !== undefined,
  );
  if (ours.length === 0) return;
  for (const pair of ours) {
    const phases = [active[pair.first], active[pair.second]] as [FollowedPhase, FollowedPhase];
    if (pair.phases?.[0] === phases[0] && pair.phases[1] === phases[1]) continue;
    pair.phases = phases;
    pair.phasesFromMs = Number.NaN;
  }
  const steps = Math.ceil((toMs - fromMs) / SAMPLE_MS);
  let before = new Float64Array(6 * active.length);
  let after = new Float64Array(6 * active.length);
  let beforeMs = fromMs;
  for (let k = 0; k <= steps; k++) {
    const afterMs = fromMs + ((toMs - fromMs) * k) / steps;
    for (const [i, phase] of active.entries()) {
      if (phase === undefined) continue;
      if (failed.has(phase) || !recordStateAt(phase.records, phase.place, afterMs, after, 6 * i)) {
        failed.add(phase);
        after.fill(Number.NaN, 6 * i, 6 * i + 6);
      }
    }
    for (const pair of ours)
      takeSample(pair, k === 0 ? undefined : before, beforeMs, after, afterMs, limitKm);
    [before, after] = [after, before];
    beforeMs = afterMs;
  }
}

/** Takes one sample of a pair, and looks at the interval before it where its minimum may matter. */
function takeSample(
  pair: Pair,
  before: Float64Array | undefined,
  beforeMs: number,
  after: Float64Array,
  afterMs: number,
  limitKm: number,
): void {
  const i = 6 * pair.first;
  const j = 6 * pair.second;
  const x = after[j] - after[i];
  const y = after[j + 1] - after[i + 1];
  const z = after[j + 2] - after[i + 2];
  const distance = Math.sqrt(x * x + y * y + z * z);
  if (Number.isNaN(distance)) return;
  const vx = after[j + 3] - after[i + 3];
  const vy = after[j + 4] - after[i + 4];
  const vz = after[j + 5] - after[i + 5];
  const speed = Math.sqrt(vx * vx + vy * vy + vz * vz);
  if (Number.isNaN(pair.startMs)) pair.startMs = afterMs;
  if (Number.isNaN(pair.phasesFromMs)) pair.phasesFromMs = afterMs;
  pair.endMs = afterMs;
  pair.endKm = distance;
  if (before !== undefined) lookBetween(pair, before, beforeMs, after, afterMs, distance, speed, limitKm);
  if (distance < pair.closestKm) {
    pair.closestKm = distance;
    pair.closestMs = afterMs;
    pair.closestPhases = pair.phases;
  }
  if (distance > limitKm) return;
  pair.lastInsideMs = afterMs;
  pair.exit = undefined;
  if (speed < pair.slowestKmPerS) pair.slowestKmPerS = speed;
}

const relative = new Float64Array(6);

/** @param distance at the end of the interval, as `speed` */
function lookBetween(
  pair: Pair,
  before: Float64Array,
  beforeMs: number,
  after: Float64Array,
  afterMs: number,
  distance: number,
  speed: number,
  limitKm: number,
): void {
  const halfS = (afterMs - beforeMs) / 2000;
  const isInside = distance <= limitKm;
  const i = 6 * pair.first;
  const j = 6 * pair.second;
  const x = before[j] - before[i];
  const y = before[j + 1] - before[i + 1];
  const z = before[j + 2] - before[i + 2];
  const wasInside = x * x + y * y + z * z <= limitKm * limitKm;
  if (wasInside && !isInside) leave(pair, beforeMs, afterMs);
  // Only what is within the limit has a row; and of that only what is closer than all before, or came in unseen.
  const wanted = !wasInside && !isInside ? limitKm : Math.min(limitKm, pair.closestKm);
  // From this far off nothing gets there within the interval, whatever its direction.
  if (distance - 2.2 * speed * halfS > wanted + TIDE_SLACK * distance) return;
  const lowest = Math.min(lowestOnHalf(before, i, j, halfS, 1), lowestOnHalf(after, i, j, halfS, -1));
  if (!(lowest < wanted)) return;
  const [first, second] = pair.phases as readonly [FollowedPhase, FollowedPhase];
  for (const { tcaMs } of slowMinima(first, second, beforeMs, afterMs)) {
    if (!relativeStateAt(first, second, tcaMs, relative)) continue;
    const atTcaKm = Math.hypot(relative[0], relative[1], relative[2]);
    if (atTcaKm < pair.closestKm) {
      pair.closestKm = atTcaKm;
      pair.closestMs = tcaMs;
      pair.closestPhases = pair.phases;
    }
    if (atTcaKm > limitKm) continue;
    pair.slowestKmPerS = Math.min(pair.slowestKmPerS, Math.hypot(relative[3], relative[4], relative[5]));
    if (!isInside) leave(pair, tcaMs, afterMs);
  }
}

/** A bound below the distance over the half of an interval at one of its ends. */
function lowestOnHalf(states: Float64Array, i: number, j: number, halfS: number, direction: 1 | -1): number {
  const x = states[j] - states[i];
  const y = states[j + 1] - states[i + 1];
  const z = states[j + 2] - states[i + 2];
  const vx = direction * (states[j + 3] - states[i + 3]);
  const vy = direction * (states[j + 4] - states[i + 4]);
  const vz = direction * (states[j + 5] - states[i + 5]);
  const distance = Math.sqrt(x * x + y * y + z * z);
  const speed2 = vx * vx + vy * vy + vz * vz;
  const turn = -(x * vx + y * vy + z * vz);
  const s = speed2 > 0 ? Math.min(halfS, Math.max(0, turn / speed2)) : 0;
  const straight = Math.sqrt((x + vx * s) ** 2 + (y + vy * s) ** 2 + (z + vz * s) ** 2);
  const radius2 = Math.min(
    states[i] ** 2 + states[i + 1] ** 2 + states[i + 2] ** 2,
    states[j] ** 2 + states[j + 1] ** 2 + states[j + 2] ** 2,
  );
  // The lower object may sink by what it falls in half a minute; 10 percent more tide covers that.
  const tide = 1.1 * tidePerS2(Math.sqrt(radius2));
  return straight - 0.5 * tide * halfS * halfS * (distance + Math.sqrt(speed2) * halfS);
}

function leave(pair: Pair, insideMs: number, outsideMs: number): void {
  pair.lastInsideMs = insideMs;
  pair.exit = { insideMs, outsideMs };
  pair.exitPhases = pair.phases;
}

function finished(pair: Pair, limitKm: number): FollowedPair {
  let { lastInsideMs } = pair;
  if (pair.exit !== undefined && pair.exitPhases !== undefined) {
    let { insideMs, outsideMs } = pair.exit;
    while (outsideMs - insideMs > EDGE_PRECISION_MS) {
      const middleMs = (insideMs + outsideMs) / 2;
      if (distanceAt(pair.exitPhases, middleMs) <= limitKm) insideMs = middleMs;
      else outsideMs = middleMs;
    }
    lastInsideMs = insideMs;
  }
  const [first, second] = pair.phases as readonly [FollowedPhase, FollowedPhase];
  const [atFirst, atSecond] = pair.closestPhases as readonly [FollowedPhase, FollowedPhase];
  relativeStateAt(atFirst, atSecond, pair.closestMs, relative);
  const speed = Math.hypot(relative[3], relative[4], relative[5]);
  return {
    first: pair.first,
    second: pair.second,
    closestMs: pair.closestMs,
    closestKm: pair.closestKm,
    closestSpeedKmPerS: speed,
    slowestKmPerS: Math.min(pair.slowestKmPerS, speed),
    lastInsideMs,
    startMs: pair.startMs,
    endMs: pair.endMs,
    endKm: pair.endKm,
    lastStretch: { first, second, fromMs: pair.phasesFromMs, toMs: pair.endMs },
  };
}

/** NaN where SGP4 gives no state. */
export function distanceAt([first, second]: readonly [FollowedPhase, FollowedPhase], timeMs: number): number {
  return relativeStateAt(first, second, timeMs, relative)
    ? Math.hypot(relative[0], relative[1], relative[2])
    : Number.NaN;
}
