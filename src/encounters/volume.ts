import { recordStateAt } from '../ephemeris/record-states.js';
import type { PlacedRecord } from '../ephemeris/sgp4-records.js';
import type { Vector3 } from '../vector.js';

/** Screening volume around object 1, in the terms of CCSDS 508.0-B-1. */
export type ScreeningVolume =
  | { readonly shape: 'SPHERE'; readonly missKm: number }
  | { readonly shape: 'BOX' | 'ELLIPSOID'; readonly halfSizeRtnKm: Vector3 };

/** When object 2 is inside the volume. */
export type Passage = { readonly entryMs: number; readonly exitMs: number };

/** Radius of the sphere around a volume, km: no point of the volume is farther from object 1. */
export function enclosingRadiusKm(volume: ScreeningVolume): number {
  if (volume.shape === 'SPHERE') return volume.missKm;
  return volume.shape === 'BOX' ? Math.hypot(...volume.halfSizeRtnKm) : Math.max(...volume.halfSizeRtnKm);
}

/** Samples from the center of the sphere to its surface at the speed of the encounter. */
const SAMPLES_ACROSS_RADIUS = 16;
const SHORTEST_SAMPLE_MS = 20;
const LONGEST_SAMPLE_MS = 30_000;
const EDGE_PRECISION_MS = 0.01;
const GOLDEN = (Math.sqrt(5) - 1) / 2;

/**
 * The passage of object 2 through the volume around a closest approach, on true SGP4 states.
 *
 * It is looked for while the pair stays inside the sphere around the volume, up to the next largest
 * distance on either side, so that each closest approach has a passage of its own. Leaving the volume
 * and coming back between two closest approaches is not told apart: the stretch around the innermost point
 * counts. Times are cut at the limits.
 *
 * @returns `undefined` when object 2 stays outside
 */
export function passageThrough(
  object1: PlacedRecord,
  object2: PlacedRecord,
  tcaMs: number,
  speedKmPerS: number,
  volume: ScreeningVolume,
  fromMs: number,
  toMs: number,
): Passage | undefined {
  const radiusKm = enclosingRadiusKm(volume);
  const stepMs = Math.min(
    LONGEST_SAMPLE_MS,
    Math.max(SHORTEST_SAMPLE_MS, (1000 * radiusKm) / (SAMPLES_ACROSS_RADIUS * speedKmPerS)),
  );
  const depthAt = (timeMs: number) => depth(object1, object2, timeMs, volume).depth;
  const before = walk(object1, object2, volume, tcaMs, -stepMs, fromMs, radiusKm).reverse();
  const after = walk(object1, object2, volume, tcaMs, stepMs, toMs, radiusKm);
  const samples = [...before, { timeMs: tcaMs, ...depth(object1, object2, tcaMs, volume) }, ...after];
  let innermost = 0;
  for (let k = 1; k < samples.length; k++) if (samples[k].depth < samples[innermost].depth) innermost = k;
  const low = samples[Math.max(0, innermost - 1)].timeMs;
  const high = samples[Math.min(samples.length - 1, innermost + 1)].timeMs;
  const centerMs = leastBetween(depthAt, low, high);
  if (!(depthAt(centerMs) <= 1)) return undefined;
  return {
    entryMs: edge(depthAt, samples.filter(({ timeMs }) => timeMs < centerMs).reverse(), centerMs),
    exitMs: edge(
      depthAt,
      samples.filter(({ timeMs }) => timeMs > centerMs),
      centerMs,
    ),
  };
}

type Sample = { readonly timeMs: number; readonly depth: number; readonly distanceKm: number };

/** 0 at object 1, 1 on the surface of the volume; NaN where SGP4 gives no state. */
function depth(
  object1: PlacedRecord,
  object2: PlacedRecord,
  timeMs: number,
  volume: ScreeningVolume,
): { depth: number; distanceKm: number } {
  if (
    !recordStateAt(object1.records, object1.place, timeMs, states, 0) ||
    !recordStateAt(object2.records, object2.place, timeMs, states, 6)
  ) {
    return { depth: Number.NaN, distanceKm: Number.NaN };
  }
  const [x, y, z, vx, vy, vz] = states;
  const dx = states[6] - x;
  const dy = states[7] - y;
  const dz = states[8] - z;
  const distanceKm = Math.sqrt(dx * dx + dy * dy + dz * dz);
  if (volume.shape === 'SPHERE') return { depth: distanceKm / volume.missKm, distanceKm };
  const radius = Math.sqrt(x * x + y * y + z * z);
  const hx = y * vz - z * vy;
  const hy = z * vx - x * vz;
  const hz = x * vy - y * vx;
  const momentum = Math.sqrt(hx * hx + hy * hy + hz * hz);
  const radial = (dx * x + dy * y + dz * z) / radius;
  const normal = (dx * hx + dy * hy + dz * hz) / momentum;
  const transverse =
    (dx * (hy * z - hz * y) + dy * (hz * x - hx * z) + dz * (hx * y - hy * x)) / (momentum * radius);
  const [r, t, n] = volume.halfSizeRtnKm;
  return {
    depth:
      volume.shape === 'BOX'
        ? Math.max(Math.abs(radial) / r, Math.abs(transverse) / t, Math.abs(normal) / n)
        : Math.hypot(radial / r, transverse / t, normal / n),
    distanceKm,
  };
}

const states = new Float64Array(12);

/** Samples away from the closest approach until the pair leaves the sphere, comes closer again or time is up. */
function walk(
  object1: PlacedRecord,
  object2: PlacedRecord,
  volume: ScreeningVolume,
  tcaMs: number,
  stepMs: number,
  limitMs: number,
  radiusKm: number,
): Sample[] {
  const samples: Sample[] = [];
  let lastKm = 0;
  for (let k = 1; ; k++) {
    const wantedMs = tcaMs + k * stepMs;
    const timeMs = stepMs > 0 ? Math.min(wantedMs, limitMs) : Math.max(wantedMs, limitMs);
    const sample = { timeMs, ...depth(object1, object2, timeMs, volume) };
    if (Number.isNaN(sample.depth) || (k > 2 && sample.distanceKm < lastKm)) return samples;
    samples.push(sample);
    lastKm = sample.distanceKm;
    if (sample.distanceKm > radiusKm || timeMs === limitMs) return samples;
  }
}

/** Where the depth crosses 1, walking outward from the center through the samples on one side; the last one if it never does. */
function edge(depthAt: (timeMs: number) => number, outward: readonly Sample[], centerMs: number): number {
  let insideMs = centerMs;
  for (const { timeMs, depth: sampled } of outward) {
    if (sampled <= 1) {
      insideMs = timeMs;
      continue;
    }
    let outsideMs = timeMs;
    while (Math.abs(outsideMs - insideMs) > EDGE_PRECISION_MS) {
      const middleMs = (insideMs + outsideMs) / 2;
      if (depthAt(middleMs) <= 1) insideMs = middleMs;
      else outsideMs = middleMs;
    }
    return (insideMs + outsideMs) / 2;
  }
  return insideMs;
}

/** Golden-section search of a function with one minimum. */
function leastBetween(f: (x: number) => number, from: number, to: number): number {
  let low = from;
  let high = to;
  let left = high - GOLDEN * (high - low);
  let right = low + GOLDEN * (high - low);
  let fLeft = f(left);
  let fRight = f(right);
  while (high - low > EDGE_PRECISION_MS) {
    if (fLeft <= fRight) {
      high = right;
      right = left;
      fRight = fLeft;
      left = high - GOLDEN * (high - low);
      fLeft = f(left);
    } else {
      low = left;
      left = right;
      fLeft = fRight;
      right = low + GOLDEN * (high - low);
      fRight = f(right);
    }
  }
  return (low + high) / 2;
}
