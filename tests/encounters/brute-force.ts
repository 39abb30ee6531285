import { type SatRec, sgp4 } from 'satellite.js';
import type { ElementSet } from '../../src/elements/element-set.js';
import { sgp4RecordOf } from '../../src/elements/sgp4-record.js';

/** `i` counts in the first list, `j` in the second, or in the first where all were screened on all (`i` < `j`). */
export type BruteForceEncounter = {
  readonly i: number;
  readonly j: number;
  /** Milliseconds of UTC since 1970-01-01. */
  readonly tcaMs: number;
  readonly missKm: number;
  readonly relativeSpeedKmPerS: number;
};

export type BruteForceOptions = {
  readonly first: readonly ElementSet[];
  /** Without it `first` is screened on itself, every pair once. */
  readonly second?: readonly ElementSet[];
  readonly startMs: number;
  readonly endMs: number;
  /** Default 10 s: far below the time in which two orbits can come close, part and come close again. */
  readonly stepS?: number;
};

/** Half sizes along R, T and N of object 1. */
export type BruteForceVolume = {
  readonly shape: 'box' | 'ellipsoid';
  readonly halfSizesKm: readonly [number, number, number];
};

/** One stay of object `j` in the volume around object `i`. */
export type BruteForcePassage = {
  readonly i: number;
  readonly j: number;
  /** Entry and exit, or the edge of the window (or the failure of one object) where it lies inside by then. */
  readonly entryMs: number;
  readonly exitMs: number;
  readonly entryIsEdge: boolean;
  readonly exitIsEdge: boolean;
  /** Where the distance is smallest between entry and exit. */
  readonly closestMs: number;
  readonly closestKm: number;
};

/** Half the span of the central difference that stands for the rate of the distance. */
const DIFFERENCE_MS = 50;
/** A tenth of what is asked of a TCA. */
const TCA_PRECISION_MS = 0.01;
/** Orbital speed changes by less than this between grid points 10 s apart: gravity is below 10 m/s2. */
const ACCELERATION_KM_PER_S2 = 0.01;

/**
 * Every local minimum of the distance between two objects that is at most `missKm` and lies in
 * [startMs, endMs], found by plain sampling of true SGP4 states and no search structure.
 *
 * A minimum is where the distance between SGP4 *positions* is smallest. SGP4's velocity is not quite the
 * derivative of its position (typically some cm/s apart, meters a second in low decaying orbits), so the
 * zero of relative position times relative velocity lies elsewhere: by microseconds in a fast encounter, by
 * seconds in a slow one, where the distance barely changes in that time.
 *
 * A distance that is smallest at the edge of the window is no local minimum. An object counts until SGP4
 * first fails on the grid; the moment is bisected. Sorted by TCA, then by `i` and `j`.
 */
export function bruteForceEncounters(
  options: BruteForceOptions & { readonly missKm: number },
): BruteForceEncounter[] {
  const { startMs, endMs, missKm } = options;
  const stepMs = (options.stepS ?? 10) * 1000;
  const encounters: BruteForceEncounter[] = [];
  forEachPair(options, stepMs, (a, b, i, j) => {
    const lastMs = Math.min(a.untilMs, b.untilMs);
    let foundMs = Number.NEGATIVE_INFINITY;
    forEachNearPoint(a, b, stepMs, missKm, (k) => {
      for (const [lowMs, highMs] of bracketsAt(a, b, k, stepMs, lastMs)) {
        const offsetMs = minimumOf(a, b, lowMs, highMs);
        if (offsetMs < 0 || offsetMs > endMs - startMs || offsetMs - foundMs < 1) continue;
        const distance = distanceKm(a, b, offsetMs);
        if (distance > missKm) continue;
        foundMs = offsetMs;
        encounters.push({
          i,
          j,
          tcaMs: startMs + offsetMs,
          missKm: distance,
          relativeSpeedKmPerS: relativeSpeedKmPerS(a, b, offsetMs),
        });
      }
    });
  });
  return encounters.sort((x, y) => x.tcaMs - y.tcaMs || x.i - y.i || x.j - y.j);
}

/**
 * Every stay of the second object in a volume fixed to R, T and N of the first, SGP4's own position and
 * velocity giving the axes. Sorted by entry, then by `i` and `j`. All-on-all gives the pair (i, j) with
 * `i` < `j` only: the volume is around `i`.
 *
 * The grid is refined to 1 s where the objects are near and fast; between its points the volume measure has
 * one minimum, because relative motion is nearly straight.
 */
export function bruteForcePassages(
  options: BruteForceOptions & { readonly volume: BruteForceVolume },
): BruteForcePassage[] {
  const { startMs, endMs, volume } = options;
  const stepMs = (options.stepS ?? 10) * 1000;
  const subdivisions = Math.max(1, Math.round(stepMs / 1000));
  const fineMs = stepMs / subdivisions;
  const reachKm = Math.hypot(...volume.halfSizesKm);
  const passages: BruteForcePassage[] = [];
  forEachPair(options, stepMs, (a, b, i, j) => {
    const lastMs = Math.min(a.untilMs, b.untilMs, endMs - startMs);
    if (lastMs < 0) return;
    const measure = (offsetMs: number) => volumeMeasure(a, b, offsetMs, volume);
    // Offsets, in fine steps, at which the pair may be near, each once, in order.
    const near = new Set<number>();
    forEachNearPoint(a, b, stepMs, reachKm, (k) => {
      const strideOfFine = isFastAt(a, b, k, stepMs) ? 1 : subdivisions;
      for (let m = -subdivisions; m <= subdivisions; m += strideOfFine) near.add((k - 1) * subdivisions + m);
    });
    const fine = [...near].sort((x, y) => x - y);
    const measured = new Map<number, number>();
    const measureAt = (offsetMs: number) => {
      const known = measured.get(offsetMs) ?? measure(offsetMs);
      measured.set(offsetMs, known);
      return known;
    };
    const at = (n: number) => Math.min(Math.max(n * fineMs, 0), lastMs);
    let entryMs: number | undefined;
    let entryIsEdge = false;
    const close = (exitMs: number, exitIsEdge: boolean) => {
      if (entryMs === undefined) return;
      const { closestMs, closestKm } = closestBetween(a, b, entryMs, exitMs, fineMs);
      passages.push({
        i,
        j,
        entryMs: startMs + entryMs,
        exitMs: startMs + exitMs,
        entryIsEdge,
        exitIsEdge,
        closestMs: startMs + closestMs,
        closestKm,
      });
      entryMs = undefined;
    };
    for (let index = 0; index < fine.length; index += 1) {
      const n = fine[index];
      if (n * fineMs <= -stepMs || n * fineMs > lastMs) continue;
      const hereMs = at(n);
      const inside = measureAt(hereMs) <= 1;
      if (inside && entryMs === undefined) {
        entryMs = hereMs;
        entryIsEdge = true;
      }
      const next = fine[index + 1];
      // A gap longer than a step: the pair is far apart in between.
      if (next === undefined || next - n > subdivisions || at(next) === hereMs) continue;
      const nextMs = at(next);
      const nextInside = measureAt(nextMs) <= 1;
      if (inside && !nextInside) {
        close(bisect(measure, hereMs, nextMs), false);
      } else if (!inside && nextInside) {
        entryMs = bisect(measure, nextMs, hereMs);
        entryIsEdge = false;
      } else if (!inside) {
        // Neither end inside: in and out again between two points, if there is a minimum between them.
        const strideMs = nextMs - hereMs;
        if (
          measureAt(hereMs - strideMs) < measureAt(hereMs) ||
          measureAt(nextMs + strideMs) < measureAt(nextMs)
        ) {
          continue;
        }
        const lowestMs = goldenMinimum(measure, hereMs, nextMs);
        if (measure(lowestMs) <= 1) {
          entryMs = bisect(measure, lowestMs, hereMs);
          entryIsEdge = false;
          close(bisect(measure, lowestMs, nextMs), false);
        }
      }
    }
    close(lastMs, true);
  });
  return passages.sort((x, y) => x.entryMs - y.entryMs || x.i - y.i || x.j - y.j);
}

/** One object on the grid; offsets are milliseconds from the start of the window. */
type Track = {
  readonly record: SatRec;
  /** Start of the window minus epoch: offsets keep digits that times since 1970 would lose. */
  readonly ageAtStartMs: number;
  /** x, y, z by grid point; point k lies at (k - 1) steps; NaN where SGP4 failed. */
  readonly positionsKm: Float64Array;
  readonly highestSpeedKmPerS: number;
  /** Offset at which SGP4 first fails, `Infinity` where it doesn't, negative where it fails at the start. */
  readonly untilMs: number;
};

function trackOf(set: ElementSet, startMs: number, stepMs: number, count: number): Track {
  const record = sgp4RecordOf(set);
  const ageAtStartMs = startMs - set.epochMs;
  const positionsKm = new Float64Array(3 * count).fill(Number.NaN);
  const failed = { record, ageAtStartMs, positionsKm, highestSpeedKmPerS: 0, untilMs: -1 };
  if (record.error !== 0) return failed;
  let highestSpeedKmPerS = 0;
  let untilMs = Number.POSITIVE_INFINITY;
  for (let k = 0; k < count; k += 1) {
    const offsetMs = (k - 1) * stepMs;
    const state = sgp4(record, (ageAtStartMs + offsetMs) / 60_000);
    if (state === null) {
      if (k === 0) continue;
      if (k === 1) return failed;
      let goodMs = offsetMs - stepMs;
      untilMs = offsetMs;
      while (untilMs - goodMs > TCA_PRECISION_MS) {
        const middleMs = (goodMs + untilMs) / 2;
        if (sgp4(record, (ageAtStartMs + middleMs) / 60_000) === null) untilMs = middleMs;
        else goodMs = middleMs;
      }
      untilMs = goodMs;
      break;
    }
    const { position, velocity } = state;
    positionsKm[3 * k] = position.x;
    positionsKm[3 * k + 1] = position.y;
    positionsKm[3 * k + 2] = position.z;
    highestSpeedKmPerS = Math.max(highestSpeedKmPerS, Math.hypot(velocity.x, velocity.y, velocity.z));
  }
  highestSpeedKmPerS += (ACCELERATION_KM_PER_S2 * stepMs) / 1000;
  return { record, ageAtStartMs, positionsKm, highestSpeedKmPerS, untilMs };
}

function forEachPair(
  options: BruteForceOptions,
  stepMs: number,
  visit: (a: Track, b: Track, i: number, j: number) => void,
): void {
  const { startMs, endMs } = options;
  // One point before the window and at least one behind it, so that minima next to its edges have both neighbors.
  const count = Math.ceil((endMs - startMs) / stepMs) + 3;
  const tracks = (sets: readonly ElementSet[]) => sets.map((set) => trackOf(set, startMs, stepMs, count));
  const first = tracks(options.first);
  const second = options.second === undefined ? first : tracks(options.second);
  for (let i = 0; i < first.length; i += 1) {
    for (let j = options.second === undefined ? i + 1 : 0; j < second.length; j += 1) {
      if (first[i].untilMs >= 0 && second[j].untilMs >= 0) visit(first[i], second[j], i, j);
    }
  }
}

/**
 * Visits every grid point within a step of which the pair could be `nearKm` apart. Points are passed over only
 * where even head-on flight at the highest speeds would not bridge the distance.
 */
function forEachNearPoint(
  a: Track,
  b: Track,
  stepMs: number,
  nearKm: number,
  visit: (k: number) => void,
): void {
  const kmPerStep = ((a.highestSpeedKmPerS + b.highestSpeedKmPerS) * stepMs) / 1000;
  const p = a.positionsKm;
  const q = b.positionsKm;
  const count = p.length / 3;
  let k = 1;
  while (k < count - 1) {
    const x = p[3 * k] - q[3 * k];
    const y = p[3 * k + 1] - q[3 * k + 1];
    const z = p[3 * k + 2] - q[3 * k + 2];
    const spareSteps = Math.floor((Math.sqrt(x * x + y * y + z * z) - nearKm) / kmPerStep);
    if (Number.isNaN(spareSteps)) return;
    if (spareSteps < 1) visit(k);
    k += Math.max(1, spareSteps - 1);
  }
}

/**
 * Pairs of offsets with a minimum between them: around grid point k where it is nearer than both neighbors;
 * where the pair ends before the next point, around such points of a finer grid.
 */
function bracketsAt(a: Track, b: Track, k: number, stepMs: number, lastMs: number): [number, number][] {
  const offsetMs = (k - 1) * stepMs;
  if (offsetMs + stepMs <= lastMs) {
    const isMinimum = isLowest(
      gridDistanceKm(a, b, k - 1),
      gridDistanceKm(a, b, k),
      gridDistanceKm(a, b, k + 1),
    );
    return isMinimum ? [[offsetMs - stepMs, offsetMs + stepMs]] : [];
  }
  const beginMs = offsetMs - stepMs;
  const partMs = (lastMs - DIFFERENCE_MS - beginMs) / 40;
  const distances = Array.from({ length: 41 }, (_, n) => distanceKm(a, b, beginMs + n * partMs));
  return distances.flatMap((distance, n) =>
    n > 0 && n < 40 && isLowest(distances[n - 1], distance, distances[n + 1])
      ? [[beginMs + (n - 1) * partMs, beginMs + (n + 1) * partMs] as [number, number]]
      : [],
  );
}

function isLowest(before: number, here: number, after: number): boolean {
  return before > here && here <= after;
}

/** Whether the pair moves by more than 0.5 km/s against each other around grid point k. */
function isFastAt(a: Track, b: Track, k: number, stepMs: number): boolean {
  const movedKm = [0, 1, 2].map((axis) => {
    const after = 3 * (k + 1) + axis;
    const before = 3 * (k - 1) + axis;
    return a.positionsKm[after] - b.positionsKm[after] - (a.positionsKm[before] - b.positionsKm[before]);
  });
  return !(Math.hypot(...movedKm) < (0.5 * 2 * stepMs) / 1000);
}

function gridDistanceKm(a: Track, b: Track, k: number): number {
  const p = a.positionsKm;
  const q = b.positionsKm;
  return Math.hypot(p[3 * k] - q[3 * k], p[3 * k + 1] - q[3 * k + 1], p[3 * k + 2] - q[3 * k + 2]);
}

/** Bisects the rate of the squared distance, taken as a central difference of true positions. */
function minimumOf(a: Track, b: Track, lowMs: number, highMs: number): number {
  const rate = (offsetMs: number) =>
    distanceKm(a, b, offsetMs + DIFFERENCE_MS) ** 2 - distanceKm(a, b, offsetMs - DIFFERENCE_MS) ** 2;
  let low = lowMs;
  let high = highMs;
  while (high - low > TCA_PRECISION_MS) {
    const middle = (low + high) / 2;
    if (rate(middle) < 0) low = middle;
    else high = middle;
  }
  return (low + high) / 2;
}

/** At most 1 inside the volume. */
function volumeMeasure(a: Track, b: Track, offsetMs: number, volume: BruteForceVolume): number {
  const one = stateOf(a, offsetMs);
  const two = stateOf(b, offsetMs);
  if (one === null || two === null) return Number.POSITIVE_INFINITY;
  const { position: r, velocity: v } = one;
  const d = { x: two.position.x - r.x, y: two.position.y - r.y, z: two.position.z - r.z };
  const h = { x: r.y * v.z - r.z * v.y, y: r.z * v.x - r.x * v.z, z: r.x * v.y - r.y * v.x };
  const t = { x: h.y * r.z - h.z * r.y, y: h.z * r.x - h.x * r.z, z: h.x * r.y - h.y * r.x };
  const along = (axis: typeof d) =>
    (d.x * axis.x + d.y * axis.y + d.z * axis.z) / Math.hypot(axis.x, axis.y, axis.z);
  const [sizeR, sizeT, sizeN] = volume.halfSizesKm;
  const parts = [along(r) / sizeR, along(t) / sizeT, along(h) / sizeN];
  return volume.shape === 'box' ? Math.max(...parts.map(Math.abs)) : Math.hypot(...parts);
}

function closestBetween(
  a: Track,
  b: Track,
  entryMs: number,
  exitMs: number,
  fineMs: number,
): { closestMs: number; closestKm: number } {
  const distance = (offsetMs: number) => distanceKm(a, b, offsetMs);
  const parts = Math.max(4, Math.ceil((exitMs - entryMs) / fineMs));
  const partMs = (exitMs - entryMs) / parts;
  let best = 0;
  for (let n = 1; n <= parts; n += 1) {
    if (distance(entryMs + n * partMs) < distance(entryMs + best * partMs)) best = n;
  }
  const lowMs = entryMs + Math.max(0, best - 1) * partMs;
  const highMs = entryMs + Math.min(parts, best + 1) * partMs;
  const closestMs = [goldenMinimum(distance, lowMs, highMs), entryMs, exitMs].reduce((x, y) =>
    distance(y) < distance(x) ? y : x,
  );
  return { closestMs, closestKm: distance(closestMs) };
}

function bisect(measure: (offsetMs: number) => number, insideMs: number, outsideMs: number): number {
  let inside = insideMs;
  let outside = outsideMs;
  while (Math.abs(outside - inside) > TCA_PRECISION_MS) {
    const middle = (inside + outside) / 2;
    if (measure(middle) <= 1) inside = middle;
    else outside = middle;
  }
  return inside;
}

/** Golden-section search (Kiefer 1953) for the minimum of a function with one minimum between the ends. */
function goldenMinimum(value: (offsetMs: number) => number, lowMs: number, highMs: number): number {
  const ratio = (Math.sqrt(5) - 1) / 2;
  let low = lowMs;
  let high = highMs;
  let left = high - ratio * (high - low);
  let right = low + ratio * (high - low);
  let leftValue = value(left);
  let rightValue = value(right);
  while (high - low > TCA_PRECISION_MS) {
    if (leftValue < rightValue) {
      high = right;
      right = left;
      rightValue = leftValue;
      left = high - ratio * (high - low);
      leftValue = value(left);
    } else {
      low = left;
      left = right;
      leftValue = rightValue;
      right = low + ratio * (high - low);
      rightValue = value(right);
    }
  }
  return (low + high) / 2;
}

function stateOf(track: Track, offsetMs: number): ReturnType<typeof sgp4> {
  return sgp4(track.record, (track.ageAtStartMs + offsetMs) / 60_000);
}

function distanceKm(a: Track, b: Track, offsetMs: number): number {
  const one = stateOf(a, offsetMs)?.position;
  const two = stateOf(b, offsetMs)?.position;
  if (one === undefined || two === undefined) return Number.NaN;
  return Math.hypot(two.x - one.x, two.y - one.y, two.z - one.z);
}

function relativeSpeedKmPerS(a: Track, b: Track, offsetMs: number): number {
  const one = stateOf(a, offsetMs)?.velocity;
  const two = stateOf(b, offsetMs)?.velocity;
  if (one === undefined || two === undefined) return Number.NaN;
  return Math.hypot(two.x - one.x, two.y - one.y, two.z - one.z);
}
