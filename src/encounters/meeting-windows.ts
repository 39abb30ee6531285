import { type MeanOrbits, stateOnMeanOrbit, unevenKmPerS, unevenKmPerS2 } from '../ephemeris/mean-orbits.js';
import { passesNear, tidePerS2 } from './bounds.js';

/**
 * When two objects can meet, from their mean orbits alone.
 *
 * Take an encounter at a time t of the span: SGP4 has both objects within D, so their ellipses are within
 * D' = D + (tolerances of both), and seen from the Earth's center the directions are within alpha of each
 * other, sin(alpha / 2) = D' / (2 r) with r no lower than the higher of the two perigees less D'. Let gamma be
 * the angle between the planes, x and y the angles of the objects from the line in which the planes meet, in
 * their direction of motion. By spherical trigonometry
 *
 *   cos(separation) = cos^2(gamma / 2) cos(x - y) + sin^2(gamma / 2) cos(x + y),
 *
 * so that sin(|x - y| / 2) <= sin(alpha / 2) / cos(gamma / 2), and each object is no farther off the other's
 * plane than alpha: |sin x|, |sin y| <= sin(alpha) / sin(gamma).
 *
 * 1. Phase. S, the same difference for mean arguments of latitude, differs from x - y by at most the equation
 *    of the center of both, 2 e + 1.3 e^2 each. It runs at the rate
 *    u1' - u2' + (N1' - N2')(cos i1 + cos i2) / (1 + cos gamma) (relative turn of the two orbital frames,
 *    along the bisector of the planes' normals), N' the rates of the nodes; over half a span H with
 *    h = |N1' - N2'| H it leaves that line by less than 2 h^2 / (1 + cos gamma).
 *    With unit vectors m toward the mean position, k a quarter turn ahead in the plane, and w = m x k,
 *    (1 + cos gamma) cos S = m1 . m2 + k1 . k2 and (1 + cos gamma) sin S = m1 . k2 - k1 . m2.
 * 2. Node. Unless the planes nearly coincide, the encounter lies where object 1 passes the line of the planes.
 *    The line moves along a plane by at most h / sin gamma; the equation of the center there is
 *    2 (e_along sin u - e_across cos u) but for 1.6 e^2.
 * 3. Path. Around the middle of a window of half length T the ellipses' paths run as in bound 4 of `bounds.ts`,
 *    with what they differ from gravity added.
 *
 * 1 is for all pairs, 2 and 3 for those that pass it.
 */
export type MeetingWindow = { readonly middleS: number; readonly halfS: number };

/** What test 1 needs of each object: m, k, w. */
export type OrbitFrames = { readonly vectors: Float64Array };

const FRAME_SIZE = 9;
/** Planes closer to opposite than this (11 degrees) are not asked for their phase. */
const LEAST_ONE_PLUS_COSINE = 0.02;
/** Above this part of sin gamma, alpha leaves the place along the line of the planes open. */
const LARGEST_SINE = 0.45;
/** Wider windows about passages of the line, half a turn apart but for equations of the center, could overlap. */
const LARGEST_HALF_TURN = 1.3;
/** Windows are cut into pieces no longer than twice this, so that paths in them are nearly straight. */
const LONGEST_HALF_S = 100;
/** By so much an orbit with e up to 0.1 can be lower elsewhere in a piece than where it meets another. */
const RADIUS_ROOM_KM = 100;

export function createOrbitFrames(count: number): OrbitFrames {
  return { vectors: new Float64Array(FRAME_SIZE * count) };
}

/** Lays the frame of an object in the middle of the span. */
export function layOrbitFrame({ vectors }: OrbitFrames, orbits: MeanOrbits, object: number): void {
  const sinU = Math.sin(orbits.latitude[object]);
  const cosU = Math.cos(orbits.latitude[object]);
  const sinNode = Math.sin(orbits.node[object]);
  const cosNode = Math.cos(orbits.node[object]);
  const cosI = orbits.cosInclination[object];
  const sinI = orbits.sinInclination[object];
  const at = FRAME_SIZE * object;
  vectors[at] = cosNode * cosU - sinNode * cosI * sinU;
  vectors[at + 1] = sinNode * cosU + cosNode * cosI * sinU;
  vectors[at + 2] = sinI * sinU;
  vectors[at + 3] = -cosNode * sinU - sinNode * cosI * cosU;
  vectors[at + 4] = -sinNode * sinU + cosNode * cosI * cosU;
  vectors[at + 5] = sinI * cosU;
  vectors[at + 6] = sinNode * sinI;
  vectors[at + 7] = -cosNode * sinI;
  vectors[at + 8] = cosI;
}

/** What the tests share within one span. */
export type MeetingSearch = {
  readonly orbits: MeanOrbits;
  readonly frames: OrbitFrames;
  /** H, seconds: windows lie between -H and H. */
  readonly halfSpanS: number;
  /** D. */
  readonly missKm: number;
};

function centerEquation(eccentricity: number): number {
  return eccentricity * (2 + 1.3 * eccentricity);
}

/** Test 1: whether the phases of two objects let them meet at all. Their radii must overlap already. */
export function canMeet(search: MeetingSearch, a: number, b: number): boolean {
  const { orbits, halfSpanS, missKm } = search;
  const { vectors } = search.frames;
  const i = FRAME_SIZE * a;
  const j = FRAME_SIZE * b;
  const onePlus =
    1 + vectors[i + 6] * vectors[j + 6] + vectors[i + 7] * vectors[j + 7] + vectors[i + 8] * vectors[j + 8];
  if (onePlus < LEAST_ONE_PLUS_COSINE) return true;
  const cosPhase =
    vectors[i] * vectors[j] +
    vectors[i + 1] * vectors[j + 1] +
    vectors[i + 2] * vectors[j + 2] +
    vectors[i + 3] * vectors[j + 3] +
    vectors[i + 4] * vectors[j + 4] +
    vectors[i + 5] * vectors[j + 5];
  const reachKm = missKm + orbits.toleranceKm[a] + orbits.toleranceKm[b];
  const seen = reachKm / (2 * (Math.max(orbits.lowKm[a], orbits.lowKm[b]) - reachKm));
  const widest =
    largestPhase(search, a, b, onePlus, seen) + halfSpanS * Math.abs(phaseRate(orbits, a, b, onePlus));
  // cos z >= 1 - z^2 / 2.
  return cosPhase >= onePlus * (1 - 0.5 * widest * widest);
}

/**
 * The largest |S| at an encounter; infinite where the phase says nothing.
 *
 * @param seen sin(alpha / 2)
 */
function largestPhase(
  { orbits, halfSpanS }: MeetingSearch,
  a: number,
  b: number,
  onePlus: number,
  seen: number,
): number {
  const turn = Math.abs(orbits.nodeRate[a] - orbits.nodeRate[b]) * halfSpanS;
  // cos(gamma / 2), less what the turn of the nodes can take from it.
  const ratio = seen * Math.sqrt(2 / onePlus) * (1 + (0.8 * turn) / Math.sqrt(onePlus));
  if (ratio > 0.5) return Number.POSITIVE_INFINITY;
  return (
    // Twice the arc sine of up to a half.
    2.1 * ratio +
    centerEquation(orbits.eccentricity[a]) +
    centerEquation(orbits.eccentricity[b]) +
    (2 * turn * turn) / onePlus
  );
}

function phaseRate(orbits: MeanOrbits, a: number, b: number, onePlus: number): number {
  return (
    orbits.latitudeRate[a] -
    orbits.latitudeRate[b] +
    ((orbits.nodeRate[a] - orbits.nodeRate[b]) * (orbits.cosInclination[a] + orbits.cosInclination[b])) /
      onePlus
  );
}

/**
 * Tests 2 and 3: the windows in which two objects can meet. They don't overlap (passages of the line are half a
 * turn apart, and phases that differ by turns are met at different times); together they hold every time of the
 * span at which SGP4 has the two within D.
 *
 * @param windows takes the windows, in no certain order
 */
export function meetingWindows(search: MeetingSearch, a: number, b: number, windows: MeetingWindow[]): void {
  const { orbits, halfSpanS, missKm } = search;
  const { vectors } = search.frames;
  const i = FRAME_SIZE * a;
  const j = FRAME_SIZE * b;
  const dot = (from: number, to: number) =>
    vectors[i + from] * vectors[j + to] +
    vectors[i + from + 1] * vectors[j + to + 1] +
    vectors[i + from + 2] * vectors[j + to + 2];
  const onePlus = 1 + dot(6, 6);
  const reachKm = missKm + orbits.toleranceKm[a] + orbits.toleranceKm[b];
  const lowestKm = Math.max(orbits.lowKm[a], orbits.lowKm[b]) - reachKm;
  const turn = Math.abs(orbits.nodeRate[a] - orbits.nodeRate[b]) * halfSpanS;
  for (const [fromS, toS] of timesInPhase(search, a, b, onePlus, reachKm / (2 * lowestKm), dot)) {
    // The line of the planes, w1 x w2, along m1 and along k1.
    const lineAlongM = -dot(3, 6);
    const lineAlongK = dot(0, 6);
    const leastSine = Math.sqrt(lineAlongM ** 2 + lineAlongK ** 2) - turn;
    const sineSeen = reachKm / lowestKm;
    const e = orbits.eccentricity[a];
    const rate = orbits.latitudeRate[a];
    const off = 1.06 * (sineSeen / leastSine) + turn / leastSine + 1.6 * e * e + 0.05 * e;
    const halfTurn = off / (1 - 2.2 * e);
    if (!(leastSine > 0 && sineSeen < LARGEST_SINE * leastSine && halfTurn < LARGEST_HALF_TURN)) {
      cutIntoPieces(search, a, b, fromS, toS, windows);
      continue;
    }
    const toLine = Math.atan2(lineAlongK, lineAlongM);
    const atLine = orbits.latitude[a] + toLine;
    const center = 2 * (orbits.eAlong[a] * Math.sin(atLine) - orbits.eAcross[a] * Math.cos(atLine));
    const halfS = halfTurn / rate;
    const first = Math.ceil(((fromS - halfS) * rate - toLine - Math.abs(center)) / Math.PI);
    const last = Math.floor(((toS + halfS) * rate - toLine + Math.abs(center)) / Math.PI);
    for (let k = first; k <= last; k++) {
      const passS = (toLine + k * Math.PI - (k % 2 === 0 ? center : -center)) / rate;
      const from = Math.max(fromS, passS - halfS);
      const to = Math.min(toS, passS + halfS);
      if (from < to) cutIntoPieces(search, a, b, from, to, windows);
    }
  }
}

/** The stretches of the span in which |S| is small enough. */
function timesInPhase(
  search: MeetingSearch,
  a: number,
  b: number,
  onePlus: number,
  seen: number,
  dot: (from: number, to: number) => number,
): [number, number][] {
  const { orbits, halfSpanS } = search;
  const whole: [number, number][] = [[-halfSpanS, halfSpanS]];
  if (onePlus < LEAST_ONE_PLUS_COSINE) return whole;
  const most = largestPhase(search, a, b, onePlus, seen);
  const rate = phaseRate(orbits, a, b, onePlus);
  if (most > Math.PI || rate === 0) return whole;
  const phase = Math.atan2(dot(0, 3) - dot(3, 0), dot(0, 0) + dot(3, 3));
  const swept = Math.abs(rate) * halfSpanS + most;
  const found: [number, number][] = [];
  const first = Math.ceil((-phase - swept) / (2 * Math.PI));
  const last = Math.floor((-phase + swept) / (2 * Math.PI));
  for (let turns = first; turns <= last; turns++) {
    const now = phase + 2 * Math.PI * turns;
    // |now + rate t| <= most
    const one = (-most - now) / rate;
    const other = (most - now) / rate;
    const from = Math.max(-halfSpanS, Math.min(one, other));
    const to = Math.min(halfSpanS, Math.max(one, other));
    if (from < to) found.push([from, to]);
  }
  return found;
}

const states = new Float64Array(12);

/** Test 3 on pieces of a window. */
function cutIntoPieces(
  { orbits, missKm }: MeetingSearch,
  a: number,
  b: number,
  fromS: number,
  toS: number,
  windows: MeetingWindow[],
): void {
  const pieces = Math.max(1, Math.ceil((toS - fromS) / (2 * LONGEST_HALF_S)));
  const halfS = (toS - fromS) / (2 * pieces);
  const reachKm =
    missKm +
    orbits.toleranceKm[a] +
    orbits.toleranceKm[b] +
    halfS * (unevenKmPerS(orbits, a) + unevenKmPerS(orbits, b)) +
    0.5 * halfS * halfS * (unevenKmPerS2(orbits, a) + unevenKmPerS2(orbits, b));
  const tide = tidePerS2(Math.max(orbits.lowKm[a], orbits.lowKm[b]) - reachKm - RADIUS_ROOM_KM);
  for (let k = 0; k < pieces; k++) {
    const middleS = fromS + (2 * k + 1) * halfS;
    stateOnMeanOrbit(orbits, a, middleS, states, 0);
    stateOnMeanOrbit(orbits, b, middleS, states, 6);
    if (passesNear(states, 0, 6, halfS, reachKm, tide)) windows.push({ middleS, halfS });
  }
}
