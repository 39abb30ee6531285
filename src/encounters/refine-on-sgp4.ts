import type { PlacedRecord } from '../ephemeris/sgp4-records.js';
import type { ClosestApproach } from './closest-approach.js';
import { fastMinimum } from './fast-minimum.js';
import type { Minimum } from './minimum.js';
import { createPositionSamples, type PositionSamples } from './position-samples.js';
import type { SearchObjects, SearchRules } from './search-problem.js';
import { slowMinima } from './slow-minima.js';

/** Grid of the samples of a slow pair. */
export const SLOW_GRID_MS = 40_000;
/** A refined TCA is taken by the stretch of time that holds it; this much over its edges covers rounding. */
const EDGE_MS = 0.01;

/** What refining on SGP4 works on. */
export type Sgp4Refiner = {
  readonly objects: SearchObjects;
  readonly rules: SearchRules;
  /** Of the objects of slow pairs. */
  readonly samples: Map<number, PositionSamples>;
};

/** Object indices, `first` < `second`. */
export type ObjectPair = { readonly first: number; readonly second: number };

export type Stretch = { readonly fromMs: number; readonly toMs: number };

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
  const minimum = fastMinimum(object1, object2, guessMs, reachMs, rules.missKm);
  if (minimum === 'none') return;
  if (minimum === 'unsettled') refineSlowPair(refiner, pair, stretch, approaches);
  else accept(refiner, pair, minimum, stretch, approaches);
}

/** Finds all closest approaches of a pair in a stretch of time. */
export function refineSlowPair(
  refiner: Sgp4Refiner,
  pair: ObjectPair,
  stretch: Stretch,
  approaches: ClosestApproach[],
): void {
  const object1 = samplesOf(refiner, pair.first);
  const object2 = samplesOf(refiner, pair.second);
  const fromMs = stretch.fromMs - EDGE_MS;
  const toMs = stretch.toMs + EDGE_MS;
  for (const minimum of slowMinima(object1, object2, fromMs, toMs)) {
    accept(refiner, pair, minimum, stretch, approaches);
  }
}

export function refinedObject({ records }: SearchObjects, object: number): PlacedRecord {
  return { records, place: object };
}

function samplesOf({ objects, samples }: Sgp4Refiner, object: number): PositionSamples {
  let known = samples.get(object);
  if (known === undefined) {
    known = createPositionSamples(refinedObject(objects, object), SLOW_GRID_MS);
    samples.set(object, known);
  }
  return known;
}

/** Takes a closest approach that lies in the stretch, in the window and in the time of both objects. */
function accept(
  { objects, rules }: Sgp4Refiner,
  { first, second }: ObjectPair,
  { tcaMs, missKm }: Minimum,
  { fromMs, toMs }: Stretch,
  approaches: ClosestApproach[],
): void {
  if (!(tcaMs >= fromMs - EDGE_MS && tcaMs < toMs + EDGE_MS)) return;
  if (tcaMs < rules.startMs || tcaMs >= rules.endMs) return;
  if (tcaMs < objects.validFromMs[first] || tcaMs >= objects.validToMs[first]) return;
  if (tcaMs < objects.validFromMs[second] || tcaMs >= objects.validToMs[second]) return;
  if (missKm <= rules.missKm) approaches.push({ first, second, tcaMs, missKm });
}
