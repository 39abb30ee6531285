import { pairKey } from '../../encounters/search-problem.js';
import { enclosingRadiusKm, type ScreeningVolume } from '../../encounters/volume.js';
import type { ScreenedObject } from '../screened-object.js';
import { type SearchPlan, searchPlanOf } from '../search-plan.js';
import { withinReach } from '../within-reach.js';
import { slippedObjects } from './batch-objects.js';
import { type FlyingAlong, findFlyingAlong } from './flying-along.js';

/** Several liftoffs of one batch as one search. */
export type LiftoffSearch = {
  readonly slipsMs: readonly number[];
  /** Phases of the batch in one liftoff: object `s * phaseCount + p` is phase `p` of slip `s`. */
  readonly phaseCount: number;
  /** The copies of the batch, liftoff by liftoff, then the others that come within reach of any. */
  readonly objects: readonly ScreenedObject[];
  readonly flying: readonly FlyingAlong[];
  readonly plan: SearchPlan;
};

/** More copies of the batch in one search would cost memory: for their records, and for all that they meet. */
const MOST_COPIES = 3100;

/**
 * Puts all slipped copies of the batch as primaries into one search, each with a time of its own in which it
 * exists, so that what does not change with the slip (above all the flight of the catalog) is done once.
 * Copies never meet each other. Of objects that fly along with the copies of a liftoff no encounters are
 * searched with these. `loadSgp4` must have been awaited.
 *
 * @param batch phases of the nominal launch
 * @param window of the nominal launch
 * @param settings `onlyProbability` where the rest of an assessment is not wanted
 */
export function liftoffSearch(
  slipsMs: readonly number[],
  batch: readonly ScreenedObject[],
  others: readonly ScreenedObject[],
  window: { readonly startMs: number; readonly endMs: number },
  settings: {
    readonly volume: ScreeningVolume;
    readonly maxAgeDays: number;
    readonly onlyProbability: boolean;
  },
): LiftoffSearch {
  const phaseCount = batch.length;
  const copies = slipsMs.flatMap((slipMs) => slippedObjects(batch, slipMs, window.endMs));
  const startMs = window.startMs + Math.min(...slipsMs);
  const endMs = window.endMs + Math.max(...slipsMs);
  const missKm = enclosingRadiusKm(settings.volume);
  const objects = [...copies, ...withinReach(others, copies, missKm, startMs, endMs)];
  const whole = searchPlanOf(objects, copies.length, {
    startMs,
    endMs,
    withinPrimaries: false,
    skippedPairs: [],
    volume: settings.volume,
    maxAgeDays: settings.maxAgeDays,
    onlyProbability: settings.onlyProbability,
  });
  const flying = findFlyingAlong(objects, whole.objects.records, copies.length, missKm);
  const skipped = new Set<number>();
  for (const { first, second } of flying) {
    const liftoff = Math.floor(first / phaseCount);
    for (let phase = 0; phase < phaseCount; phase++) {
      skipped.add(pairKey(liftoff * phaseCount + phase, second, objects.length));
    }
  }
  const plan = { ...whole, skippedPairs: [...skipped] };
  return { slipsMs, phaseCount, objects, flying, plan };
}

/** Slips in groups that fit one search each. */
export function slipGroups(slipsMs: readonly number[], phaseCount: number): number[][] {
  const size = Math.max(1, Math.floor(MOST_COPIES / phaseCount));
  const groups: number[][] = [];
  for (let k = 0; k < slipsMs.length; k += size) groups.push(slipsMs.slice(k, k + size));
  return groups;
}
