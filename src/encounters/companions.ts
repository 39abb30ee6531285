import { recordStateAt } from '../ephemeris/record-states.js';
import { type RefinedObject, relativeStateAt, slowTcas } from './refine.js';
import type { SearchObjects, SearchRules } from './search-problem.js';

/** Companions never part by more than this, km, or by twice the miss distance where that is more. */
export const COMPANION_LIMIT_KM = 10;
/** Companions are slower than this relative to each other, at every sample. */
export const COMPANION_SPEED_KM_PER_S = 0.01;

const SAMPLE_MS = 300_000;
/** Two satellites that drift past each other in a short window part within days: they are an encounter. */
const LEAST_FOLLOWED_MS = 3 * 86_400_000;
const CLOSEST_GRID_MS = 20_000;

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
  const companions: Companions[] = [];
  for (const [first, second] of closePairsAt(rules.startMs, limitKm, objects, rules)) {
    const pair = followPair(first, second, limitKm, objects, rules);
    if (pair !== undefined && pair.closestKm <= rules.missKm) companions.push(pair);
  }
  return companions.sort((a, b) => a.first - b.first || a.second - b.second);
}

/** Pairs within the limit and slow at one time: objects sorted along one axis, each compared with the next ones. */
function closePairsAt(
  timeMs: number,
  limitKm: number,
  objects: SearchObjects,
  rules: SearchRules,
): [number, number][] {
  const states = new Float64Array(6 * objects.count);
  const alive: number[] = [];
  for (let i = 0; i < objects.count; i++) {
    if (objects.validFromMs[i] > timeMs || objects.validToMs[i] < rules.endMs) continue;
    if (recordStateAt(objects.records, i, timeMs, states, 6 * i)) alive.push(i);
  }
  alive.sort((a, b) => states[6 * a] - states[6 * b] || a - b);
  const pairs: [number, number][] = [];
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
      pairs.push([first, second]);
    }
  }
  return pairs;
}

const relative = new Float64Array(6);

function followPair(
  first: number,
  second: number,
  limitKm: number,
  objects: SearchObjects,
  { startMs, endMs }: SearchRules,
): Companions | undefined {
  const side = (place: number) => ({ records: objects.records, place });
  const followedToMs = startMs + Math.max(endMs - startMs, LEAST_FOLLOWED_MS);
  const together = flightTogether(
    side(first),
    side(second),
    { startMs, endMs, followedToMs },
    (distanceKm) => (distanceKm <= limitKm ? COMPANION_SPEED_KM_PER_S : Number.NaN),
  );
  return together && { first, second, ...together };
}

/**
 * How two objects fly together, sampled every five minutes.
 *
 * @param span figures are those from `startMs` to `endMs`; the pair must hold together to `followedToMs`
 * @param fastestAt highest relative speed allowed at a distance, km/s; NaN where the distance is too large
 * @returns `undefined` where a sample breaks that, or SGP4 gives no state
 */
export function flightTogether(
  object1: RefinedObject,
  object2: RefinedObject,
  span: { readonly startMs: number; readonly endMs: number; readonly followedToMs: number },
  fastestAt: (distanceKm: number) => number,
): Omit<Companions, 'first' | 'second'> | undefined {
  const { startMs, endMs, followedToMs } = span;
  const distanceAt = (timeMs: number) =>
    relativeStateAt(object1, object2, timeMs, relative)
      ? Math.hypot(relative[0], relative[1], relative[2])
      : Number.NaN;
  let closestMs = startMs;
  let closestKm = Number.POSITIVE_INFINITY;
  let farthestKm = 0;
  let slowest = Number.POSITIVE_INFINITY;
  let fastest = 0;
  const samples = Math.max(1, Math.ceil((followedToMs - startMs) / SAMPLE_MS));
  for (let k = 0; k <= samples; k++) {
    const timeMs = startMs + ((followedToMs - startMs) * k) / samples;
    const distance = distanceAt(timeMs);
    const speed = Math.hypot(relative[3], relative[4], relative[5]);
    // Written so that a NaN breaks it, too.
    if (!(speed <= fastestAt(distance))) return undefined;
    if (timeMs > endMs) continue;
    if (distance < closestKm) {
      closestKm = distance;
      closestMs = timeMs;
    }
    farthestKm = Math.max(farthestKm, distance);
    slowest = Math.min(slowest, speed);
    fastest = Math.max(fastest, speed);
  }
  const fromMs = Math.max(startMs, closestMs - SAMPLE_MS);
  const toMs = Math.min(endMs, closestMs + SAMPLE_MS);
  for (const timeMs of slowTcas(object1, object2, fromMs, toMs, CLOSEST_GRID_MS)) {
    const distance = distanceAt(timeMs);
    if (distance < closestKm) {
      closestKm = distance;
      closestMs = timeMs;
    }
  }
  return { closestMs, closestKm, farthestKm, slowestKmPerS: slowest, fastestKmPerS: fastest };
}
