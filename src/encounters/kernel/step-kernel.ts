/*
 * The inner loops of one step of the search, in AssemblyScript: compiled to WebAssembly by `npm run build`, for
 * its four-lane arithmetic. `src/encounters/step-kernel.ts` owns the memory and tells this code, through the
 * exported variables, where each array lies; nothing here allocates.
 */

/** Reads the pairs found so far and empties their room. */
declare function takePairs(count: i32): void;

/** Six floats of state (km, km/s) and the radius interval in shells: one record an object. */
const RECORD_BYTES: usize = 32;
/** Eight doubles for each axis, lowest power first. */
const SEGMENT_BYTES: usize = 192;
const BANDS: f64 = 4096;
const FLAT: i32 = 0;
const STEEP: i32 = 1;
const FAST: i32 = 2;
const KINDS: i32 = 3;
const ABSENT: i32 = -1;

// By object.
declare const coefficients: usize;
declare const segmentStartS: usize;
declare const segmentS: usize;
declare const fromS: usize;
declare const toS: usize;
declare const curvature: usize;
declare const marginKm: usize;
declare const records: usize;
/** Group of each object: (side x KINDS + kind) x cellCount + cell; ABSENT where it is not there. */
declare const groups: usize;

// Cells of directions.
declare const rowOfBand: usize;
declare const firstCell: usize;
declare const lastCell: usize;
declare const cellsPerOctant: usize;

// Sorting: objects in order of height, then by group.
declare const shellStart: usize;
declare const byHeight: usize;
/** First place of each group in the sorted arrays; one more than there are groups. */
declare const groupStart: usize;
declare const groupNext: usize;

// In sorted order, with room for four more at the end.
declare const sortedObject: usize;
declare const sortedX: usize;
declare const sortedY: usize;
declare const sortedZ: usize;
declare const sortedVx: usize;
declare const sortedVy: usize;
declare const sortedVz: usize;
declare const sortedLow: usize;
declare const sortedHigh: usize;

declare const pairs: usize;
declare const pairRoom: i32;
export let pairCount: i32 = 0;
/** Groups of four against one that were looked at. */
export let visits: i32 = 0;

/**
 * Evaluates objects in the middle of a step from their segments, which must hold that time.
 *
 * @param candidates where the numbers of `count` objects lie
 * @param primaryCount objects with a lower number are on side 0, the others on side 1
 * @param flatSwingKm radius change over half a step that makes an object steep
 * @param ordinaryRate angular rate that makes it fast, per s
 */
export function evaluate(
  candidates: usize,
  count: i32,
  primaryCount: i32,
  cellCount: i32,
  timeS: f64,
  halfStepS: f64,
  flatSwingKm: f64,
  ordinaryRate: f64,
): void {
  const halfSquareS2 = 0.5 * halfStepS * halfStepS;
  for (let k = 0; k < count; k++) {
    const object = load<i32>(candidates + ((<usize>k) << 2));
    const byte = (<usize>object) << 3;
    const group = groups + ((<usize>object) << 2);
    if (!(load<f64>(toS + byte) > timeS - halfStepS && load<f64>(fromS + byte) < timeS + halfStepS)) {
      store<i32>(group, ABSENT);
      continue;
    }
    const perLength = 1 / load<f64>(segmentS + byte);
    const u = (timeS - load<f64>(segmentStartS + byte)) * perLength;
    const out = records + <usize>object * RECORD_BYTES;
    let at = coefficients + <usize>object * SEGMENT_BYTES;
    let radius2: f64 = 0;
    let rDotV: f64 = 0;
    let speed2: f64 = 0;
    for (let axis: usize = 0; axis < 3; axis++) {
      // Horner's rule for the polynomial, and for its derivative beside it.
      let p = load<f64>(at, 56);
      let v = p;
      p = p * u + load<f64>(at, 48);
      v = v * u + p;
      p = p * u + load<f64>(at, 40);
      v = v * u + p;
      p = p * u + load<f64>(at, 32);
      v = v * u + p;
      p = p * u + load<f64>(at, 24);
      v = v * u + p;
      p = p * u + load<f64>(at, 16);
      v = v * u + p;
      p = p * u + load<f64>(at, 8);
      v = (v * u + p) * perLength;
      p = p * u + load<f64>(at);
      store<f32>(out + (axis << 2), <f32>p);
      store<f32>(out + (axis << 2), <f32>v, 12);
      radius2 += p * p;
      rDotV += p * v;
      speed2 += v * v;
      at += 64;
    }
    const radius = sqrt(radius2);
    const swing = (abs(rDotV) / radius) * halfStepS + load<f64>(curvature + byte) * halfSquareS2;
    const margin = load<f64>(marginKm + byte);
    store<f32>(out, <f32>shellOf(radius - swing - margin), 24);
    store<f32>(out, <f32>shellOf(radius + swing + margin), 28);
    // Angular rate at the lowest point of the step; J2 changes the momentum by far less than what is added.
    const rate = ordinaryRate * (radius - swing) * (radius - swing);
    const isFast = 1.004 * (radius2 * speed2 - rDotV * rDotV) > rate * rate;
    const kind = isFast ? FAST : swing > flatSwingKm ? STEEP : FLAT;
    const side = object < primaryCount ? 0 : KINDS;
    const cell = cellOf(<f64>load<f32>(out), <f64>load<f32>(out, 4), <f64>load<f32>(out, 8) / radius);
    store<i32>(group, (side + kind) * cellCount + cell);
  }
}

/** `shellOf` of shell.ts. */
function shellOf(radiusKm: f64): i32 {
  const shell = radiusKm < 9400 ? (radiusKm - 6200) * 2 : 6400 + (radiusKm - 9400) / 80;
  return shell < 0 ? 0 : shell >= 8192 ? 8191 : <i32>shell;
}

/** `cellOf` of direction-cells.ts, to the last bit. */
function cellOf(x: f64, y: f64, sinLatitude: f64): i32 {
  const band = <usize>(<i32>((sinLatitude + 1) * (BANDS / 2)));
  const row = <usize>load<i32>(rowOfBand + (band << 2));
  const absX = abs(x);
  const absY = abs(y);
  const tangent = (absY - absX) / (absY + absX);
  const size = abs(tangent);
  let octants = 1 + tangent * (1 + (1 - size) * (0.31156 + 0.08442 * size));
  if (x < 0) octants = 4 - octants;
  if (y < 0) octants = 8 - octants;
  const cell = load<i32>(firstCell + (row << 2)) + <i32>(octants * load<f64>(cellsPerOctant + (row << 3)));
  const last = load<i32>(lastCell + (row << 2));
  return min(cell, last);
}

/** Sorts what is there by group and, within a group, by the lower ends of the radius intervals: counting sorts. */
export function sort(candidates: usize, count: i32, groupCount: i32, shells: i32): void {
  memory.fill(shellStart, 0, (<usize>(shells + 1)) << 2);
  memory.fill(groupStart, 0, (<usize>(groupCount + 1)) << 2);
  for (let k = 0; k < count; k++) {
    const object = <usize>load<i32>(candidates + ((<usize>k) << 2));
    const group = load<i32>(groups + (object << 2));
    if (group === ABSENT) continue;
    const shell = shellStart + ((<usize>load<f32>(records + object * RECORD_BYTES, 24)) << 2);
    store<i32>(shell, load<i32>(shell, 4) + 1, 4);
    const start = groupStart + ((<usize>group) << 2);
    store<i32>(start, load<i32>(start, 4) + 1, 4);
  }
  addUp(shellStart, shells);
  addUp(groupStart, groupCount);
  memory.copy(groupNext, groupStart, (<usize>groupCount) << 2);
  let thereCount = 0;
  for (let k = 0; k < count; k++) {
    const object = load<i32>(candidates + ((<usize>k) << 2));
    if (load<i32>(groups + ((<usize>object) << 2)) === ABSENT) continue;
    thereCount++;
    const shell = shellStart + ((<usize>load<f32>(records + <usize>object * RECORD_BYTES, 24)) << 2);
    const place = load<i32>(shell);
    store<i32>(shell, place + 1);
    store<i32>(byHeight + ((<usize>place) << 2), object);
  }
  for (let k = 0; k < thereCount; k++) {
    const object = load<i32>(byHeight + ((<usize>k) << 2));
    const next = groupNext + ((<usize>load<i32>(groups + ((<usize>object) << 2))) << 2);
    const place = load<i32>(next);
    store<i32>(next, place + 1);
    store<i32>(sortedObject + ((<usize>place) << 2), object);
  }
  // Read here and there, written in order: ten streams written here and there cost twice as much.
  for (let k = 0; k < thereCount; k++) {
    const to = (<usize>k) << 2;
    const record = records + <usize>load<i32>(sortedObject + to) * RECORD_BYTES;
    store<f32>(sortedX + to, load<f32>(record));
    store<f32>(sortedY + to, load<f32>(record, 4));
    store<f32>(sortedZ + to, load<f32>(record, 8));
    store<f32>(sortedVx + to, load<f32>(record, 12));
    store<f32>(sortedVy + to, load<f32>(record, 16));
    store<f32>(sortedVz + to, load<f32>(record, 20));
    store<f32>(sortedLow + to, load<f32>(record, 24));
    store<f32>(sortedHigh + to, load<f32>(record, 28));
  }
}

function addUp(counts: usize, count: i32): void {
  let sum = 0;
  for (let k = 0; k <= count; k++) {
    sum += load<i32>(counts + ((<usize>k) << 2));
    store<i32>(counts + ((<usize>k) << 2), sum);
  }
}

/**
 * Finds the pairs between the objects of two kinds whose straight lines pass within `reachKm` during the step.
 *
 * @param kind1 side x KINDS + kind; four objects of it are held against one of `kind2`
 * @param listStart where the list of cells of each cell starts in `list`
 * @param eachOnce the kinds are the same and the lists name cells from the own one on: each pair is met once
 * @param every 1 for all cells; only every so many are swept otherwise
 */
export function sweep(
  kind1: i32,
  kind2: i32,
  cellCount: i32,
  listStart: usize,
  list: usize,
  eachOnce: bool,
  every: i32,
  halfStepS: f32,
  reachKm: f32,
): void {
  const groups1 = groupStart + ((<usize>(kind1 * cellCount)) << 2);
  const groups2 = groupStart + ((<usize>(kind2 * cellCount)) << 2);
  for (let cell = 0; cell < cellCount; cell += every) {
    const own = groups1 + ((<usize>cell) << 2);
    const start = load<i32>(own);
    const end = load<i32>(own, 4);
    if (start === end) continue;
    const from = load<i32>(listStart + ((<usize>cell) << 2));
    const to = load<i32>(listStart + ((<usize>cell) << 2), 4);
    for (let n = from; n < to; n++) {
      const other = load<i32>(list + ((<usize>n) << 2));
      const its = groups2 + ((<usize>other) << 2);
      const isOwn = eachOnce && other === cell;
      sweepGroups(start, end, load<i32>(its), load<i32>(its, 4), isOwn, halfStepS, reachKm);
    }
  }
}

/** Four places of a run against one after the other of a second run, both in order of height. */
function sweepGroups(
  start: i32,
  end: i32,
  otherStart: i32,
  otherEnd: i32,
  isOwn: bool,
  halfStepS: f32,
  reachKm: f32,
): void {
  const halfStep = f32x4.splat(halfStepS);
  const reach2 = f32x4.splat(reachKm * reachKm);
  // What single precision rounds away of sums of squares and products, several times over.
  const less = f32x4.splat(1 - 4e-6);
  const more = f32x4.splat(4e-6);
  const two = f32x4.splat(2);
  let first = otherStart;
  for (let i = start; i < end; i += 4) {
    const at = (<usize>i) << 2;
    const held = min(4, end - i);
    let top = load<f32>(sortedHigh + at);
    for (let lane = 1; lane < held; lane++) top = max(top, load<f32>(sortedHigh + at + ((<usize>lane) << 2)));
    const bottom = load<f32>(sortedLow + at);
    // Runs rise in `sortedLow`: what ends below this one ends below all that follow it.
    while (first < otherEnd && load<f32>(sortedHigh + ((<usize>first) << 2)) < bottom) first++;
    if (first === otherEnd) break;
    const x = v128.load(sortedX + at);
    const y = v128.load(sortedY + at);
    const z = v128.load(sortedZ + at);
    const vx = v128.load(sortedVx + at);
    const vy = v128.load(sortedVy + at);
    const vz = v128.load(sortedVz + at);
    const heldLanes = (1 << held) - 1;
    let j = isOwn ? max(first, i + 1) : first;
    const from = j;
    for (; j < otherEnd; j++) {
      const one = (<usize>j) << 2;
      if (load<f32>(sortedLow + one) > top) break;
      const dx = f32x4.sub(v128.load_splat<f32>(sortedX + one), x);
      const dy = f32x4.sub(v128.load_splat<f32>(sortedY + one), y);
      const dz = f32x4.sub(v128.load_splat<f32>(sortedZ + one), z);
      const dvx = f32x4.sub(v128.load_splat<f32>(sortedVx + one), vx);
      const dvy = f32x4.sub(v128.load_splat<f32>(sortedVy + one), vy);
      const dvz = f32x4.sub(v128.load_splat<f32>(sortedVz + one), vz);
      const distance2 = f32x4.add(f32x4.add(f32x4.mul(dx, dx), f32x4.mul(dy, dy)), f32x4.mul(dz, dz));
      const speed2 = f32x4.add(f32x4.add(f32x4.mul(dvx, dvx), f32x4.mul(dvy, dvy)), f32x4.mul(dvz, dvz));
      const along = f32x4.abs(
        f32x4.add(f32x4.add(f32x4.mul(dx, dvx), f32x4.mul(dy, dvy)), f32x4.mul(dz, dvz)),
      );
      const line = f32x4.mul(f32x4.sub(f32x4.mul(distance2, less), reach2), speed2);
      const passes = f32x4.le(line, f32x4.mul(along, along));
      if (!v128.any_true(passes)) continue;
      // The nearest point of the line lies in the step, or else the nearer end of the step is near.
      const path = f32x4.mul(speed2, halfStep);
      const isInside = f32x4.le(along, path);
      const atEnd = f32x4.add(
        f32x4.mul(distance2, less),
        f32x4.mul(halfStep, f32x4.sub(path, f32x4.mul(along, two))),
      );
      const isNearAtEnd = f32x4.le(atEnd, f32x4.add(reach2, f32x4.mul(more, f32x4.mul(halfStep, path))));
      let lanes = i32x4.bitmask(v128.and(passes, v128.or(isInside, isNearAtEnd))) & heldLanes;
      // Of the own run, only places before the other one.
      if (isOwn && j - i < 4) lanes &= (1 << (j - i)) - 1;
      if (lanes !== 0) takeLanes(lanes, at, one);
    }
    visits += j - from;
  }
}

/** Takes the pairs of the lanes that are set, where the radius intervals overlap. */
function takeLanes(lanes: i32, at: usize, one: usize): void {
  const low = load<f32>(sortedLow + one);
  const high = load<f32>(sortedHigh + one);
  const object = load<i32>(sortedObject + one);
  for (let left = lanes; left !== 0; left &= left - 1) {
    const place = at + ((<usize>ctz(left)) << 2);
    if (load<f32>(sortedLow + place) > high || load<f32>(sortedHigh + place) < low) continue;
    if (pairCount === pairRoom) {
      takePairs(pairCount);
      pairCount = 0;
    }
    const to = pairs + ((<usize>pairCount) << 3);
    store<i32>(to, load<i32>(sortedObject + place));
    store<i32>(to, object, 4);
    pairCount++;
  }
}
