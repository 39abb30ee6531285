import { cross, norm, scale, type Vector3 } from '../vector.js';
import { massInBall } from './ball-mass.js';
import { type Density, logDensity, logDensityWithin } from './density.js';
import type { PathEncounter } from './encounter-path.js';
import { perpendicularTo } from './encounter-plane.js';
import { densityAt, knotsOf, type Piece, piecesOf, positionAt, rateAt } from './path-pieces.js';
import { legendreRule } from './quadrature.js';
import { addNearChords, type Polygon, polygonOf, sweptBy } from './swept-path.js';

/** A stretch that turns by no more than this (60 degrees) can't come back to itself ... */
const LARGEST_TURN = Math.PI / 3;
/** ... if its radius of curvature is this many hard-body radii everywhere. */
const RADII_OF_CURVATURE = 4;
/** Points in time of a piece, which is up to a sigma long: that leaves an error of 1e-5. */
const TIMES = legendreRule(3);
/** A path near itself is stepped by this part of the hard-body radius or the smallest sigma, whichever is smaller. */
const STEP_PART = 0.5;
/** What is swept twice between two middles of longer steps is less than a thousandth of the whole. */
const MOST_STEPS = 5000;
/** Of the sum so far: all together what is left out stays below a thousandth of it. */
const NEGLIGIBLE_PART = 1e-10;

/**
 * Probability that the hard body meets the position error at any time, right also where the relative path
 * comes back to where it has been.
 *
 * In the turning axes of object 1 a ball of the hard-body radius R moves along the relative path through the
 * space of position errors. An error is met when the ball first reaches it: the probability is the mass in
 * the ball at the start, and the mass that enters through the leading half of its surface, where no earlier
 * part of the path has swept it. The covariance follows the slow turning of object 2 against object 1; that
 * the single error turns with it is left out, which is of the order of (error / orbit radius).
 *
 * Where no earlier part of the path can have swept the leading half (see `earlierNear`), what enters changes
 * over the time in which the path goes a sigma, and is integrated with three points in each. Elsewhere the path
 * is cut into chords of half of R, and the points of the leading half are held against the chords before. The
 * points resolve an R of up to some thirty sigmas.
 *
 * @returns `undefined` where the combined covariance is singular
 */
export function firstEntryProbability(encounter: PathEncounter): number | undefined {
  const radius = encounter.hardBodyRadiusM;
  if (radius === 0) return 0;
  const knots = knotsOf(encounter);
  if (knots === undefined) return undefined;
  const { pieces, logLeast } = piecesOf(encounter, knots);
  const counting = pieces.map(({ logLargest }) => logLargest >= logLeast);
  const polygons = polygonsOf(pieces, counting, radius);
  const [start] = knots;
  let sum = massInBall(start.positionM, radius, start.covarianceM2, [1, 0, 0], -radius, radius);
  for (let i = 0; i < pieces.length; i++) {
    if (!counting[i]) continue;
    const earlier = earlierNear(pieces, i, radius).filter((index) => counting[index]);
    sum +=
      earlier.length === 0
        ? enteringAlong(pieces[i], radius)
        : enteringFirst(pieces[i].density, polygons(i), earlier.map(polygons), radius, sum);
  }
  return Math.min(1, sum);
}

/**
 * The pieces up to this one by which its leading points may have been swept before; all others can't have.
 *
 * A leading point x of the ball at p(t) has been swept if |x - p(s)| < R for an s < t, so only from where
 * |p(t) - p(s)| < 2 R. Take a stretch that ends at t, turns by no more than 60 degrees and has no radius of
 * curvature below 4 R. Its directions v, unit vectors, have v.v' >= 1/2, so that its chords, of which the
 * square is the double integral of v.v', are at least 1/sqrt(2) of the way: those of 2.83 R of way or more are
 * longer than 2 R. On the last 2.83 R of way f(s) = |x - p(s)|^2 has the second derivative 2 (1 - c.(x - p))
 * after the way, c the vector of curvature; as |c| <= 1/(4 R) and |x - p| <= R + 2.83 R it is positive. At
 * s = t f is R^2 and falls with s (x lies ahead), so that before it is larger than R^2. What lies before the
 * stretch is told by its distance.
 */
function earlierNear(pieces: readonly Piece[], index: number, radius: number): number[] {
  const { centerM, lengthM } = pieces[index];
  const found: number[] = [];
  let turn = 0;
  let isCovered = true;
  for (let i = index; i >= 0; i--) {
    const other = pieces[i];
    turn += other.turn;
    isCovered &&= turn <= LARGEST_TURN && RADII_OF_CURVATURE * radius * other.curvature <= 1;
    if (isCovered) continue;
    const reach = 2 * radius + 0.5 * (lengthM + other.lengthM);
    if (squareBetween(centerM, other.centerM) < reach * reach) found.push(i);
  }
  return found;
}

/** The mass that enters through the leading half of the ball on its way along a piece. */
function enteringAlong({ span, from, to, density }: Piece, radius: number): number {
  const half = leadingHalf(Math.ceil(1.8 + (4 * radius) / density.smallestSigmaM));
  let sum = 0;
  for (let i = 0; i < TIMES.nodes.length; i++) {
    const part = from + 0.5 * (to - from) * (1 + TIMES.nodes[i]);
    const rate = rateAt(span, part);
    const momentary = densityAt(span, part);
    const speed = norm(rate);
    const points = placed(half, positionAt(span, part), scale(rate, 1 / speed), radius);
    let entering = 0;
    for (let k = 0; k < half.weights.length; k++) {
      entering +=
        half.weights[k] *
        Math.exp(logDensity(momentary, points[3 * k], points[3 * k + 1], points[3 * k + 2]));
    }
    sum += TIMES.weights[i] * speed * entering;
  }
  return 0.5 * (to - from) * radius * radius * sum;
}

/**
 * The same along the chords of a polygon, less what earlier ones have swept.
 *
 * @param earlier which may have swept it; itself among them where it may come back within itself
 * @param before the sum so far
 */
function enteringFirst(
  density: Density,
  polygon: Polygon,
  earlier: readonly Polygon[],
  radius: number,
  before: number,
): number {
  const half = leadingHalf(Math.ceil(8 + (2 * radius) / density.smallestSigmaM));
  const chords = polygon.length / 3 - 1;
  let sum = before;
  for (let i = 0; i < chords; i++) {
    const at = 3 * i;
    const along: Vector3 = [
      polygon[at + 3] - polygon[at],
      polygon[at + 4] - polygon[at + 1],
      polygon[at + 5] - polygon[at + 2],
    ];
    const length = norm(along);
    const middle: Vector3 = [
      0.5 * (polygon[at] + polygon[at + 3]),
      0.5 * (polygon[at + 1] + polygon[at + 4]),
      0.5 * (polygon[at + 2] + polygon[at + 5]),
    ];
    const volume = radius * radius * length;
    const most = volume * Math.exp(logDensityWithin(density, middle, radius));
    if (!(Math.PI * most > NEGLIGIBLE_PART * sum)) continue;
    const near: number[] = [];
    for (const other of earlier) {
      addNearChords(other, other === polygon ? i : other.length / 3 - 1, middle, 2 * radius, near);
    }
    const isSwept = sweptBy(near, radius);
    const points = placed(half, middle, scale(along, 1 / length), radius);
    for (let k = 0; k < half.weights.length; k++) {
      const x = points[3 * k];
      const y = points[3 * k + 1];
      const z = points[3 * k + 2];
      const entering = volume * half.weights[k] * Math.exp(logDensity(density, x, y, z));
      if (entering > NEGLIGIBLE_PART * sum && !isSwept(x, y, z)) sum += entering;
    }
  }
  return sum - before;
}

/** Polygons of the pieces by index, made when first asked for. */
function polygonsOf(
  pieces: readonly Piece[],
  counting: readonly boolean[],
  radius: number,
): (index: number) => Polygon {
  let whole = 0;
  let sigmaM = Number.POSITIVE_INFINITY;
  pieces.forEach(({ lengthM, density }, i) => {
    if (counting[i]) whole += lengthM;
    sigmaM = Math.min(sigmaM, density.smallestSigmaM);
  });
  const stepM = Math.max(STEP_PART * Math.min(radius, sigmaM), whole / MOST_STEPS);
  const made: Polygon[] = [];
  return (index) => {
    made[index] ??= polygonOf(pieces[index], stepM);
    return made[index];
  };
}

/** Directions on the leading half of a ball, each weighted by its part of the sphere and its slant. */
type LeadingHalf = {
  /** Along the way and on two axes across it, one direction after the other. */
  readonly directions: Float64Array;
  readonly weights: Float64Array;
};

const MOST_RINGS = 64;
const HALVES: LeadingHalf[] = [];

function leadingHalf(wantedRings: number): LeadingHalf {
  const rings = Math.min(MOST_RINGS, wantedRings);
  HALVES[rings] ??= leadingHalfOf(rings);
  return HALVES[rings];
}

function leadingHalfOf(rings: number): LeadingHalf {
  const spokes = 2 * rings;
  const rule = legendreRule(rings);
  const directions = new Float64Array(3 * rings * spokes);
  const weights = new Float64Array(rings * spokes);
  for (let i = 0; i < rings; i++) {
    const cosine = 0.5 * (1 + rule.nodes[i]);
    const sine = Math.sqrt(1 - cosine * cosine);
    for (let j = 0; j < spokes; j++) {
      const angle = (2 * Math.PI * (j + 0.5 * (i % 2))) / spokes;
      const k = i * spokes + j;
      directions.set([cosine, sine * Math.cos(angle), sine * Math.sin(angle)], 3 * k);
      weights[k] = 0.5 * rule.weights[i] * cosine * ((2 * Math.PI) / spokes);
    }
  }
  return { directions, weights };
}

const POINTS = new Float64Array(3 * 2 * MOST_RINGS * MOST_RINGS);

/** The points of the leading half of a ball that moves `along`: in an array that the next call writes anew. */
function placed({ directions }: LeadingHalf, center: Vector3, along: Vector3, radius: number): Float64Array {
  const first = perpendicularTo(along);
  const second = cross(along, first);
  for (let k = 0; k < directions.length; k += 3) {
    const a = radius * directions[k];
    const b = radius * directions[k + 1];
    const c = radius * directions[k + 2];
    POINTS[k] = center[0] + a * along[0] + b * first[0] + c * second[0];
    POINTS[k + 1] = center[1] + a * along[1] + b * first[1] + c * second[1];
    POINTS[k + 2] = center[2] + a * along[2] + b * first[2] + c * second[2];
  }
  return POINTS;
}

function squareBetween(a: Vector3, b: Vector3): number {
  return (a[0] - b[0]) ** 2 + (a[1] - b[1]) ** 2 + (a[2] - b[2]) ** 2;
}
