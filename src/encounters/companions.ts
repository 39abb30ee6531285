import { createBulkNodes } from '../ephemeris/bulk-nodes.js';
import { recordStateAt } from '../ephemeris/record-states.js';
import type { Sgp4Records } from '../ephemeris/sgp4-records.js';
import { createPositionSamples } from './position-samples.js';
import type { ObjectPair } from './refine-on-sgp4.js';
import type { SearchObjects, SearchRules } from './search-problem.js';
import { slowMinima } from './slow-minima.js';

/** Companions never part by more than this, km, or by twice the miss distance where that is more. */
export const COMPANION_LIMIT_KM = 10;
/** Companions are slower than this relative to each other, at every sample. */
export const COMPANION_SPEED_KM_PER_S = 0.01;

const SAMPLE_MS = 300_000;
/** Two satellites that drift past each other in a short window part within days: they are an encounter. */
const LEAST_FOLLOWED_MS = 3 * 86_400_000;
const CLOSEST_GRID_MS = 20_000;
/** Samples that all pairs are followed through at a time. */
const SAMPLES_AT_A_TIME = 32;

/** Two objects that fly together for the whole window. */
export type Companions = {
  /** Object indices, `first` < `second`. */
  readonly first: number;
  readonly second: number;
  readonly closestMs: number;
  readonly closestKm: number;
  readonly farthestKm: number;
  readonly slowestKmPerS: number;
  readonly fastestKmPerS: number;
};

/**
 * Pairs that fly together for the whole window, and for three days where it is shorter: docked complexes, one
 * object under two numbers, trailing neighbors. At samples five minutes apart they are within the limit of each
 * other and slower than 10 m/s; gravity changes the speed of two objects 10 km apart by less than 0.03 m/s a
 * second, so that between samples they part by 2 km more at the most. Their closest approach within the miss
 * distance is told once; the search leaves them out.
 *
 * Pairs that never come within the miss distance are no companions: they are not encounters either.
 */
export function findCompanions(objects: SearchObjects, rules: SearchRules): Companions[] {
  const limitKm = Math.max(COMPANION_LIMIT_KM, 2 * rules.missKm);
  const { startMs, endMs, missKm } = rules;
  const followedToMs = startMs + Math.max(endMs - startMs, LEAST_FOLLOWED_MS);
  const pairs = closePairsAt(startMs, limitKm, objects, rules);
  const flights = flightsTogether(objects.records, pairs, { startMs, endMs, followedToMs }, (distanceKm) =>
    distanceKm <= limitKm ? COMPANION_SPEED_KM_PER_S : Number.NaN,
  );
  return pairs
    .flatMap((pair, k) => {
      const flight = flights[k];
      return flight !== undefined && flight.closestKm <= missKm ? [{ ...pair, ...flight }] : [];
    })
    .sort((a, b) => a.first - b.first || a.second - b.second);
}

/** Pairs within the limit and slow at one time: objects sorted along one axis, each compared with the next ones. */
function closePairsAt(
  timeMs: number,
  limitKm: number,
  objects: SearchObjects,
  rules: SearchRules,
): ObjectPair[] {
  const states = new Float64Array(6 * objects.count);
  const alive: number[] = [];
  for (let i = 0; i < objects.count; i++) {
    if (objects.validFromMs[i] > timeMs || objects.validToMs[i] < rules.endMs) continue;
    if (recordStateAt(objects.records, i, timeMs, states, 6 * i)) alive.push(i);
  }
  alive.sort((a, b) => states[6 * a] - states[6 * b] || a - b);
  const pairs: ObjectPair[] = [];
  for (let k = 0; k < alive.length; k++) {
    const a = 6 * alive[k];
    for (let m = k + 1; m < alive.length && states[6 * alive[m]] - states[a] <= limitKm; m++) {
      const b = 6 * alive[m];
      if (Math.abs(states[a + 1] - states[b + 1]) > limitKm) continue;
      if (Math.abs(states[a + 2] - states[b + 2]) > limitKm) continue;
      const speed = Math.hypot(
        states[a + 3] - states[b + 3],
        states[a + 4] - states[b + 4],
        states[a + 5] - states[b + 5],
      );
      if (speed > COMPANION_SPEED_KM_PER_S) continue;
      const first = Math.min(alive[k], alive[m]);
      const second = Math.max(alive[k], alive[m]);
      if (first >= objects.primaryCount) continue;
      if (second < objects.primaryCount && !rules.withinPrimaries) continue;
      pairs.push({ first, second });
    }
  }
  return pairs;
}

/** How two objects fly together, sampled every five minutes. */
export type Flight = Omit<Companions, 'first' | 'second'>;

type Span = { readonly startMs: number; readonly endMs: number; readonly followedToMs: number };

/**
 * How pairs of objects fly together. `loadSgp4` must have been awaited.
 *
 * @param pairs places among the records
 * @param span figures are those from `startMs` to `endMs`; a pair must hold together to `followedToMs`
 * @param fastestAt highest relative speed allowed at a distance, km/s; NaN where the distance is too large
 * @returns for each pair, `undefined` where a sample breaks that, or SGP4 gives no state
 */
export function flightsTogether(
  records: Sgp4Records,
  pairs: readonly ObjectPair[],
  span: Span,
  fastestAt: (distanceKm: number) => number,
): (Flight | undefined)[] {
  const { startMs, followedToMs } = span;
  const samples = Math.max(1, Math.ceil((followedToMs - startMs) / SAMPLE_MS));
  const timesMs = Array.from(
    { length: samples + 1 },
    (_, k) => startMs + ((followedToMs - startMs) * k) / samples,
  );
  const figures = pairs.map(() => newFigures(startMs));
  // Most of those that part are apart at the end: a few looks from there on spare all the others.
  const few = timesMs.filter((_, k) => k % SAMPLES_AT_A_TIME === 0 || k === samples).reverse();
  let left = follow(records, pairs, [...pairs.keys()], few, fastestAt, () => undefined);
  for (let from = 0; from <= samples && left.length > 0; from += SAMPLES_AT_A_TIME) {
    const times = timesMs.slice(from, from + SAMPLES_AT_A_TIME);
    left = follow(records, pairs, left, times, fastestAt, (k, timeMs, distanceKm, speedKmPerS) => {
      if (timeMs <= span.endMs) take(figures[k], timeMs, distanceKm, speedKmPerS);
    });
  }
  const flights: (Flight | undefined)[] = pairs.map(() => undefined);
  for (const k of left) flights[k] = withClosest(records, pairs[k], figures[k], span);
  return flights;
}

/**
 * Follows some of the pairs through a few times.
 *
 * @param tell told of every pair and time that holds
 * @returns those of the pairs that no time breaks
 */
function follow(
  records: Sgp4Records,
  pairs: readonly ObjectPair[],
  followed: readonly number[],
  timesMs: readonly number[],
  fastestAt: (distanceKm: number) => number,
  tell: (pair: number, timeMs: number, distanceKm: number, speedKmPerS: number) => void,
): number[] {
  const members = [...new Set(followed.flatMap((k) => [pairs[k].first, pairs[k].second]))];
  const rowOf = new Map(members.map((place, row) => [place, row]));
  const bulk = createBulkNodes(records, members, timesMs.length);
  const { position, velocity, error } = bulk.statesAt(timesMs);
  const holding = followed.filter((k) => {
    const first = timesMs.length * (rowOf.get(pairs[k].first) as number);
    const second = timesMs.length * (rowOf.get(pairs[k].second) as number);
    return timesMs.every((timeMs, time) => {
      const a = first + time;
      const b = second + time;
      if (error[a] !== 0 || error[b] !== 0) return false;
      const distance = distanceBetween(position, 3 * a, 3 * b);
      const speed = distanceBetween(velocity, 3 * a, 3 * b);
      // Written so that a NaN breaks it, too.
      if (!(speed <= fastestAt(distance))) return false;
      tell(k, timeMs, distance, speed);
      return true;
    });
  });
  bulk.dispose();
  return holding;
}

function distanceBetween(vectors: Float64Array, a: number, b: number): number {
  return Math.hypot(
    vectors[b] - vectors[a],
    vectors[b + 1] - vectors[a + 1],
    vectors[b + 2] - vectors[a + 2],
  );
}

type Figures = { -readonly [K in keyof Flight]: Flight[K] };

function newFigures(startMs: number): Figures {
  return {
    closestMs: startMs,
    closestKm: Number.POSITIVE_INFINITY,
    farthestKm: 0,
    slowestKmPerS: Number.POSITIVE_INFINITY,
    fastestKmPerS: 0,
  };
}

function take(figures: Figures, timeMs: number, distanceKm: number, speedKmPerS: number): void {
  if (distanceKm < figures.closestKm) {
    figures.closestKm = distanceKm;
    figures.closestMs = timeMs;
  }
  figures.farthestKm = Math.max(figures.farthestKm, distanceKm);
  figures.slowestKmPerS = Math.min(figures.slowestKmPerS, speedKmPerS);
  figures.fastestKmPerS = Math.max(figures.fastestKmPerS, speedKmPerS);
}

/** Takes the minima about the closest sample into account. */
function withClosest(
  records: Sgp4Records,
  { first, second }: ObjectPair,
  figures: Flight,
  { startMs, endMs }: Span,
): Flight {
  const object1 = createPositionSamples({ records, place: first }, CLOSEST_GRID_MS);
  const object2 = createPositionSamples({ records, place: second }, CLOSEST_GRID_MS);
  let { closestMs, closestKm } = figures;
  const fromMs = Math.max(startMs, closestMs - SAMPLE_MS);
  const toMs = Math.min(endMs, closestMs + SAMPLE_MS);
  for (const { tcaMs, missKm } of slowMinima(object1, object2, fromMs, toMs)) {
    if (missKm < closestKm) {
      closestKm = missKm;
      closestMs = tcaMs;
    }
  }
  return { ...figures, closestMs, closestKm };
}
