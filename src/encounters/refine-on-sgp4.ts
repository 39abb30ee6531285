import type { ClosestApproach } from './closest-approach.js';
import {
  createRecentStates,
  type RefinedObject,
  refineFastTca,
  relativeStateAt,
  slowTcas,
} from './refine.js';
import type { SearchObjects, SearchRules } from './search-problem.js';

/** Grid of the sign changes of a slow pair. */
const SLOW_GRID_MS = 40_000;
/** A refined TCA is taken by the stretch of time that holds it; this much over its edges covers rounding. */
const EDGE_MS = 0.01;

/** What refining on SGP4 works on. */
export type Sgp4Refiner = {
  readonly objects: SearchObjects;
  readonly rules: SearchRules;
  /** The objects of slow pairs with their latest states. */
  readonly recent: Map<number, RefinedObject>;
};

/** Object indices, `first` < `second`. */
export type ObjectPair = { readonly first: number; readonly second: number };

export type Stretch = { readonly fromMs: number; readonly toMs: number };

const relative = new Float64Array(6);

/**
 * Finds the closest approach of a pair whose distance has one minimum in a stretch of time.
 *
 * @param guessMs its time, nearly
 * @param approaches takes it where it lies in the stretch and within reach
 */
export function refineFastPair(
  refiner: Sgp4Refiner,
  pair: ObjectPair,
  stretch: Stretch,
  guessMs: number,
  approaches: ClosestApproach[],
): void {
  const { objects, rules } = refiner;
  const object1 = refinedObject(objects, pair.first);
  const object2 = refinedObject(objects, pair.second);
  const reachMs = stretch.toMs - stretch.fromMs;
  const tcaMs = refineFastTca(object1, object2, guessMs, reachMs, rules.missKm);
  accept(refiner, pair, object1, object2, tcaMs, stretch, approaches);
}

/** Finds all closest approaches of a pair in a stretch of time. */
export function refineSlowPair(
  refiner: Sgp4Refiner,
  pair: ObjectPair,
  stretch: Stretch,
  approaches: ClosestApproach[],
): void {
  const object1 = objectWithRecentStates(refiner, pair.first);
  const object2 = objectWithRecentStates(refiner, pair.second);
  for (const tcaMs of slowTcas(object1, object2, stretch.fromMs, stretch.toMs, SLOW_GRID_MS)) {
    accept(refiner, pair, object1, object2, tcaMs, stretch, approaches);
  }
}

export function refinedObject({ records }: SearchObjects, object: number): RefinedObject {
  return { records, place: object };
}

/** Slow pairs are asked for at the same times, and one object is part of many in a train. */
function objectWithRecentStates({ objects, recent }: Sgp4Refiner, object: number): RefinedObject {
  let known = recent.get(object);
  if (known === undefined) {
    known = { ...refinedObject(objects, object), recent: createRecentStates() };
    recent.set(object, known);
  }
  return known;
}

/** Takes a closest approach that lies in the stretch, in the window and in the time of both objects. */
function accept(
  { objects, rules }: Sgp4Refiner,
  { first, second }: ObjectPair,
  object1: RefinedObject,
  object2: RefinedObject,
  tcaMs: number,
  { fromMs, toMs }: Stretch,
  approaches: ClosestApproach[],
): void {
  if (!(tcaMs >= fromMs - EDGE_MS && tcaMs < toMs + EDGE_MS)) return;
  if (tcaMs < rules.startMs || tcaMs >= rules.endMs) return;
  if (tcaMs < objects.validFromMs[first] || tcaMs >= objects.validToMs[first]) return;
  if (tcaMs < objects.validFromMs[second] || tcaMs >= objects.validToMs[second]) return;
  if (!relativeStateAt(object1, object2, tcaMs, relative)) return;
  const missKm = Math.sqrt(relative[0] ** 2 + relative[1] ** 2 + relative[2] ** 2);
  if (missKm <= rules.missKm) approaches.push({ first, second, tcaMs, missKm });
}
