import { createPositionSamples } from '../../encounters/position-samples.js';
import { type BatchPair, type PairRemark, sortBatchPairs } from '../../tables/batch-pairs-csv.js';
import type { ScreenedObject } from '../screened-object.js';
import { type FollowedObject, followPairs, REFINE_GRID_MS } from './follow-pairs.js';
import { groupBy } from './group-by.js';
import { pairTrend } from './pair-trend.js';

/**
 * The pairs of one deployment that are within the limit at some time: objects of the batch with each other,
 * and with those of fleet and catalog that fly along. They are the same for every liftoff, since a slip turns
 * and delays all of the batch alike. `loadSgp4` must have been awaited.
 *
 * @param batch phases of the nominal launch
 * @param along objects of fleet and catalog that fly along
 * @param isSkipped pairs told elsewhere, by designator of the batch and object of `along`
 */
export function pairRows(
  batch: readonly ScreenedObject[],
  along: readonly ScreenedObject[],
  window: { readonly startMs: number; readonly endMs: number; readonly limitKm: number },
  isSkipped: (designator: string, other: ScreenedObject) => boolean,
): BatchPair[] {
  const members = [...groupBy(batch, ({ designator }) => designator).values()];
  const objects = [...members, ...along.map((object) => [object])];
  const followed = followPairs(objects.map(followedObject), members.length, window, (first, second) => {
    return second >= members.length && isSkipped(objects[first][0].designator, objects[second][0]);
  });
  return sortBatchPairs(
    followed.map((pair) => {
      const [first, second] = [objects[pair.first][0], objects[pair.second][0]];
      const periodS = Math.max(
        periodOf(objects[pair.first], pair.lastStretch.fromMs),
        periodOf(objects[pair.second], pair.lastStretch.fromMs),
      );
      const { trend, kmPerDay } = pairTrend(pair, periodS);
      const remarks: PairRemark[] = [];
      if (pair.closestMs === pair.startMs) remarks.push('closest-at-start');
      if (pair.closestMs === pair.endMs) remarks.push('closest-at-end');
      if (pair.lastInsideMs === pair.endMs) remarks.push('inside-at-end');
      if (pair.second >= members.length) remarks.push('flies-along');
      return {
        object1: { designator: first.designator, name: first.name },
        object2: { designator: second.designator, name: second.name },
        closestMs: pair.closestMs,
        closestDistanceM: 1000 * pair.closestKm,
        closestSpeedMPerS: 1000 * pair.closestSpeedKmPerS,
        slowestMPerS: 1000 * pair.slowestKmPerS,
        lastInsideMs: pair.lastInsideMs,
        trend,
        trendMPerDay: 1000 * kmPerDay,
        endMs: pair.endMs,
        endDistanceM: 1000 * pair.endKm,
        remarks,
      };
    }),
  );
}

function followedObject(phases: readonly ScreenedObject[]): FollowedObject {
  return {
    phases: phases.map((phase) => ({
      ...createPositionSamples(phase, REFINE_GRID_MS),
      fromMs: phase.validFromMs,
      toMs: phase.validToMs,
    })),
  };
}

/** Of the phase that holds at a time. */
function periodOf(phases: readonly ScreenedObject[], timeMs: number): number {
  const phase = phases.find(({ validFromMs, validToMs }) => validFromMs <= timeMs && timeMs < validToMs);
  return (phase ?? phases[0]).orbit.periodS;
}

/** What the terminal says of the pairs. */
export function pairLines(pairs: readonly BatchPair[], limitKm: number): string[] {
  if (pairs.length === 0) return [`No two objects of the batch come within ${limitKm} km of each other.`];
  const count = (test: (pair: BatchPair) => boolean) => pairs.filter(test).length;
  const [closest] = pairs;
  return [
    `${pairs.length} ${pairs.length === 1 ? 'pair' : 'pairs'} of the batch within ${limitKm} km, each told once: ` +
      `${count(({ trend }) => trend === 'OPENING')} opening, ${count(({ trend }) => trend === 'CLOSING')} closing, ` +
      `${count(({ trend }) => trend === 'STEADY')} steady; ` +
      `${count(({ remarks }) => remarks.includes('inside-at-end'))} still within at the end.`,
    `Closest: ${closest.object1.designator} and ${closest.object2.designator}, ${closest.closestDistanceM.toFixed(0)} m` +
      `${closest.remarks.includes('closest-at-start') ? ' at release' : ''}. See batch-pairs.csv.`,
  ];
}
