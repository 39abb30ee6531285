import { EARTH_RADIUS_KM } from '../ephemeris/gravity.js';
import { createMeanOrbits, layMeanOrbit, type MeanOrbits } from '../ephemeris/mean-orbits.js';
import { SLAB_S } from '../ephemeris/node-spacing.js';
import { recordStateAt } from '../ephemeris/record-states.js';
import { hasSecularTerms, TERMS_SIZE } from '../ephemeris/secular-elements.js';
import { farthestInStepKm, isConvex, passesNear, tidePerS2 } from './bounds.js';
import type { ClosestApproach } from './closest-approach.js';
import {
  canMeet,
  createOrbitFrames,
  layOrbitFrame,
  type MeetingSearch,
  type MeetingWindow,
  meetingWindows,
  type OrbitFrames,
} from './meeting-windows.js';
import {
  type ObjectPair,
  refinedObject,
  refineFastPair,
  refineSlowPair,
  type Sgp4Refiner,
} from './refine-on-sgp4.js';
import { velocityDefectKmPerS } from './relative-state.js';
import { pairKey, type SearchObjects, type SearchRules, slabCount, slabOf } from './search-problem.js';

/**
 * Searches the pairs of a few primaries with many others one by one, by when their mean orbits let them meet:
 * no object is stepped. Only for objects whose mean orbit stands for them all window long (`hasMeanOrbit`).
 */
export type PairSearcher = {
  readonly objects: SearchObjects;
  readonly rules: SearchRules;
  readonly orbits: MeanOrbits;
  readonly frames: OrbitFrames;
  readonly primaries: Int32Array;
  readonly others: Int32Array;
};

export type PairSearchResult = {
  /** In no certain order; some twice. */
  readonly approaches: readonly ClosestApproach[];
  readonly pairsRefined: number;
};

/** As `ACCELERATION_SLACK_KM` of `bounds.ts`: what SGP4 differs from gravity in a window. */
const SLACK_KM = 0.1;

/** Slabs between two looks at whether mean orbits hold: a day, in which they change by less than the limits leave. */
const CHECKED_SLABS = 6;
const MOST_ECCENTRICITY = 0.09;
const WIDEST_TOLERANCE_KM = 36;
/** Below this SGP4 may give up soon. */
const LOWEST_RADIUS_KM = EARTH_RADIUS_KM + 145;

/** For each object 1 where a mean orbit stands for it all window long. */
export function hasMeanOrbit(objects: SearchObjects, rules: SearchRules): Uint8Array {
  const { secularTerms: terms, count } = objects;
  const has = Uint8Array.from({ length: count }, (_, i) => (hasSecularTerms(terms, TERMS_SIZE * i) ? 1 : 0));
  const trial = createMeanOrbits(1);
  const last = slabCount(rules) - 1;
  const checked = Array.from({ length: Math.ceil(last / CHECKED_SLABS) }, (_, k) => k * CHECKED_SLABS);
  for (const slab of [...checked, last]) {
    const { middleMs } = spanOf(rules, slab);
    for (let i = 0; i < count; i++) {
      if (has[i] === 0) continue;
      const isLaid = layMeanOrbit(trial, 0, terms, i, objects.epochMs[i], middleMs, SLAB_S / 2);
      if (!(isLaid && isFit(trial))) has[i] = 0;
    }
  }
  return has;
}

function isFit({ eccentricity, toleranceKm, lowKm }: MeanOrbits): boolean {
  return (
    eccentricity[0] < MOST_ECCENTRICITY && toleranceKm[0] < WIDEST_TOLERANCE_KM && lowKm[0] > LOWEST_RADIUS_KM
  );
}

/**
 * A slab exactly: where two meet, both ask for the sign of the same closing rate, so that a minimum is found by one.
 */
function spanOf(rules: SearchRules, slab: number): { middleMs: number; halfSpanS: number } {
  const { startMs, lengthS } = slabOf(rules, slab);
  return { middleMs: startMs + lengthS * 500, halfSpanS: lengthS / 2 };
}

/** @param isIncluded objects with a mean orbit, all primaries among them */
export function createPairSearcher(
  objects: SearchObjects,
  rules: SearchRules,
  isIncluded: Uint8Array,
): PairSearcher {
  const included = Int32Array.from(isIncluded.keys()).filter((object) => isIncluded[object] === 1);
  return {
    objects,
    rules,
    orbits: createMeanOrbits(objects.count),
    frames: createOrbitFrames(objects.count),
    primaries: included.filter((object) => object < objects.primaryCount),
    others: included.filter((object) => object >= objects.primaryCount),
  };
}

/** Finds every closest approach of the pairs in one slab of the window. */
export function searchPairs(searcher: PairSearcher, slab: number): PairSearchResult {
  const { objects, rules, orbits, frames, primaries, others } = searcher;
  const { secularTerms, epochMs } = objects;
  const { middleMs, halfSpanS } = spanOf(rules, slab);
  for (const list of [primaries, others]) {
    for (const object of list) {
      if (!layMeanOrbit(orbits, object, secularTerms, object, epochMs[object], middleMs, halfSpanS))
        throw new Error(`object ${object} lost its mean orbit in slab ${slab}`);
      layOrbitFrame(frames, orbits, object);
    }
  }
  const search: MeetingSearch = { orbits, frames, halfSpanS, missKm: rules.missKm };
  const refiner: Sgp4Refiner = { objects, rules, samples: new Map() };
  const windows: MeetingWindow[] = [];
  const approaches: ClosestApproach[] = [];
  let pairsRefined = 0;
  const look = (first: number, second: number) => {
    if (rules.skippedPairs.size > 0 && rules.skippedPairs.has(pairKey(first, second, objects.count))) return;
    windows.length = 0;
    meetingWindows(search, first, second, windows);
    for (const window of windows) {
      if (refineWindow(refiner, { first, second }, middleMs, window, approaches)) pairsRefined++;
    }
  };
  primaries.forEach((first, k) => {
    if (rules.withinPrimaries) forEachMeeting(search, first, primaries.subarray(k + 1), look);
    forEachMeeting(search, first, others, look);
  });
  return { approaches, pairsRefined };
}

/** Calls `look` for those of `others` whose radii overlap the object's and whose phases let them meet it. */
function forEachMeeting(
  search: MeetingSearch,
  object: number,
  others: Int32Array,
  look: (first: number, second: number) => void,
): void {
  const { lowKm, highKm } = search.orbits;
  const bottomKm = lowKm[object] - search.missKm;
  const topKm = highKm[object] + search.missKm;
  for (let k = 0; k < others.length; k++) {
    const other = others[k];
    if (lowKm[other] > topKm || highKm[other] < bottomKm) continue;
    if (canMeet(search, object, other)) look(object, other);
  }
}

const states = new Float64Array(12);

/** @returns whether the pair passes near enough on SGP4 for its closest approaches to be looked for */
function refineWindow(
  refiner: Sgp4Refiner,
  pair: ObjectPair,
  spanMiddleMs: number,
  { middleS, halfS }: MeetingWindow,
  approaches: ClosestApproach[],
): boolean {
  const { objects, rules } = refiner;
  const middleMs = spanMiddleMs + middleS * 1000;
  const stretch = { fromMs: middleMs - halfS * 1000, toMs: middleMs + halfS * 1000 };
  if (!isThere(objects, pair, stretch)) return false;
  const object1 = refinedObject(objects, pair.first);
  const object2 = refinedObject(objects, pair.second);
  const hasStates =
    recordStateAt(objects.records, pair.first, middleMs, states, 0) &&
    recordStateAt(objects.records, pair.second, middleMs, states, 6);
  if (!hasStates) throw new Error(`objects ${pair.first} and ${pair.second}: SGP4 fails on a mean orbit`);
  const defectKmPerS = velocityDefectKmPerS(object1, object2);
  const reachKm = rules.missKm + SLACK_KM + defectKmPerS * halfS;
  const [x, y, z, vx, vy, vz] = [0, 1, 2, 3, 4, 5].map((k) => states[6 + k] - states[k]);
  const speed = Math.hypot(vx, vy, vz);
  const lowestKm = Math.min(
    Math.hypot(states[0], states[1], states[2]),
    Math.hypot(states[6], states[7], states[8]),
  );
  // Over half a window an orbit with e up to 0.1 sinks by less.
  const tide = tidePerS2(lowestKm - halfS);
  if (!passesNear(states, 0, 6, halfS, reachKm, tide)) return false;
  const farthestKm = farthestInStepKm(halfS, reachKm, tide, speed);
  if (isConvex(halfS, farthestKm, tide, speed - defectKmPerS)) {
    const nearestS = -(x * vx + y * vy + z * vz) / (speed * speed);
    const guessS = Math.max(-halfS, Math.min(halfS, nearestS));
    refineFastPair(refiner, pair, stretch, middleMs + guessS * 1000, approaches);
  } else {
    refineSlowPair(refiner, pair, stretch, approaches);
  }
  return true;
}

function isThere(
  { validFromMs, validToMs }: SearchObjects,
  { first, second }: ObjectPair,
  { fromMs, toMs }: { fromMs: number; toMs: number },
): boolean {
  return (
    validFromMs[first] <= toMs &&
    validFromMs[second] <= toMs &&
    validToMs[first] >= fromMs &&
    validToMs[second] >= fromMs
  );
}
