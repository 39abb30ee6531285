import { dot, norm, rotate, type Vector3 } from '../vector.js';
import { type Density, densityOf, logDensity, logDensityWithin } from './density.js';
import {
  type PathEncounter,
  type TurningState,
  turningCovarianceAt,
  turningStateAt,
} from './encounter-path.js';

/** Between times this far apart the path is interpolated by cubics: far finer than orbits bend. */
const LONGEST_KNOT_MS = 20_000;
const FEWEST_KNOTS = 64;
/** Parts of the path whose density is under e^-18 of the largest one add nothing that shows. */
const NEGLIGIBLE_LOG = 18;
/** A piece is up to this long in the space where the combined covariance is a unit sphere ... */
const LONGEST_IN_SIGMAS = 1;
/** ... and turns by no more than this, radians, unless it is shorter than this part of the hard-body radius. */
const LARGEST_TURN = 0.5;
const SHORTEST_PART_OF_RADIUS = 0.5;
/** Only a radius of thousands of sigmas could ask for more; the likeliest part has been cut by then. */
const MOST_PIECES = 5000;

/** The path at one time, and the density of the position error then. */
type Knot = TurningState & Density & { readonly timeMs: number };

/** The path between two knots. */
type Span = { readonly left: Knot; readonly right: Knot; readonly encounter: PathEncounter };

/** A piece of the path within one span, with bounds that hold for all of it (those of the density by its middle's). */
export type Piece = {
  readonly span: Span;
  /** Parts of the span, 0 to 1. */
  readonly from: number;
  readonly to: number;
  readonly centerM: Vector3;
  /** The whole piece is within half of this of its center. */
  readonly lengthM: number;
  /** Between any two directions of the piece, radians; infinite where it may stand still. */
  readonly turn: number;
  /** Largest curvature, 1/m; infinite likewise. */
  readonly curvature: number;
  /** That of the middle. */
  readonly density: Density;
  /** Logarithm of the density at the center, and the largest one that a point of the ball on its way can have. */
  readonly logAtCenter: number;
  readonly logLargest: number;
};

/** @returns `undefined` where the combined covariance is singular */
export function knotsOf(encounter: PathEncounter): Knot[] | undefined {
  const { fromMs, toMs } = encounter;
  const count = Math.max(FEWEST_KNOTS, Math.ceil((toMs - fromMs) / LONGEST_KNOT_MS));
  const knots: Knot[] = [];
  for (let i = 0; i <= count; i++) {
    const timeMs = fromMs + ((toMs - fromMs) * i) / count;
    const state = turningStateAt(encounter, timeMs);
    const density = densityOf(state.covarianceM2);
    if (density === undefined) return undefined;
    knots.push(knotOf(timeMs, state, density));
  }
  return knots;
}

/** Field by field: spread syntax takes a good part of the time of a knot. */
function knotOf(
  timeMs: number,
  { positionM, velocityMPerS, covarianceM2 }: TurningState,
  { inverse, logNorm, smallestSigmaM }: Density,
): Knot {
  return { timeMs, positionM, velocityMPerS, covarianceM2, inverse, logNorm, smallestSigmaM };
}

/**
 * The path between the knots in pieces, in order of time: those where the density counts are short beside the
 * sigmas along the path and turn little, or are shorter than the hard-body radius.
 *
 * @returns the pieces, and the logarithm of the density below which one does not count
 */
export function piecesOf(
  encounter: PathEncounter,
  knots: readonly Knot[],
): { readonly pieces: Piece[]; readonly logLeast: number } {
  const radiusM = encounter.hardBodyRadiusM;
  // The likeliest part is cut first: the largest density is then known early, and what lies far from it stays whole.
  const byDensity = (a: Piece, b: Piece) => a.logLargest - b.logLargest;
  const waiting = knots
    .slice(1)
    .map((right, i) => pieceOf({ left: knots[i], right, encounter }, 0, 1))
    .sort(byDensity);
  const pieces: Piece[] = [];
  let logLeast = Number.NEGATIVE_INFINITY;
  for (let piece = waiting.pop(); piece !== undefined; piece = waiting.pop()) {
    logLeast = Math.max(logLeast, piece.logAtCenter - NEGLIGIBLE_LOG);
    const counts = piece.logLargest >= logLeast;
    if (!counts || isShort(piece, radiusM) || pieces.length + waiting.length >= MOST_PIECES) {
      pieces.push(piece);
      continue;
    }
    const { span, from, to } = piece;
    const middle = 0.5 * (from + to);
    const halves = [pieceOf(span, from, middle), pieceOf(span, middle, to)];
    waiting.push(...halves.sort(byDensity));
  }
  pieces.sort((a, b) => a.span.left.timeMs - b.span.left.timeMs || a.from - b.from);
  return { pieces, logLeast };
}

function pieceOf(span: Span, from: number, to: number): Piece {
  const part = 0.5 * (from + to);
  const half = 0.5 * (to - from);
  const centerM = positionAt(span, part);
  const rate = norm(rateAt(span, part));
  // The rate of the rate of a cubic is linear, so that it is largest at an end.
  const bend = Math.max(norm(bendAt(span, from)), norm(bendAt(span, to)));
  const slowest = Math.max(0, rate - bend * half);
  const lengthM = 2 * half * (rate + bend * half);
  const density = densityAt(span, part);
  return {
    span,
    from,
    to,
    centerM,
    lengthM,
    turn: slowest === 0 ? Number.POSITIVE_INFINITY : (2 * half * bend) / slowest,
    curvature: slowest === 0 ? Number.POSITIVE_INFINITY : bend / (slowest * slowest),
    density,
    logAtCenter: logDensity(density, centerM[0], centerM[1], centerM[2]),
    logLargest: logDensityWithin(density, centerM, span.encounter.hardBodyRadiusM + 0.5 * lengthM),
  };
}

function isShort({ span, from, to, lengthM, turn, density }: Piece, radiusM: number): boolean {
  if (turn > LARGEST_TURN && lengthM > SHORTEST_PART_OF_RADIUS * radiusM) return false;
  return [from, 0.5 * (from + to), to].every((part) => {
    const rate = rateAt(span, part);
    return (to - from) * Math.sqrt(dot(rate, rotate(density.inverse, rate))) <= LONGEST_IN_SIGMAS;
  });
}

/** Cubic through positions and rates of both knots. */
export function positionAt(span: Span, part: number): Vector3 {
  const rest = 1 - part;
  return combined(
    span,
    (1 + 2 * part) * rest * rest,
    part * rest * rest,
    part * part * (3 - 2 * part),
    -part * part * rest,
  );
}

/** Its first derivative after `part`, meters. */
export function rateAt(span: Span, part: number): Vector3 {
  const rest = 1 - part;
  const turn = 6 * part * rest;
  return combined(span, -turn, rest * (1 - 3 * part), turn, part * (3 * part - 2));
}

/** Its second derivative after `part`, meters. */
function bendAt(span: Span, part: number): Vector3 {
  return combined(span, 12 * part - 6, 6 * part - 4, 6 - 12 * part, 6 * part - 2);
}

function combined({ left, right }: Span, a: number, b: number, c: number, d: number): Vector3 {
  const seconds = (right.timeMs - left.timeMs) / 1000;
  const p = left.positionM;
  const v = left.velocityMPerS;
  const q = right.positionM;
  const w = right.velocityMPerS;
  return [
    a * p[0] + b * seconds * v[0] + c * q[0] + d * seconds * w[0],
    a * p[1] + b * seconds * v[1] + c * q[1] + d * seconds * w[1],
    a * p[2] + b * seconds * v[2] + c * q[2] + d * seconds * w[2],
  ];
}

/** The density at a time between the knots. One that is flat for that moment only is taken from the knot before. */
export function densityAt({ left, right, encounter }: Span, part: number): Density {
  const timeMs = left.timeMs + part * (right.timeMs - left.timeMs);
  return densityOf(turningCovarianceAt(encounter, timeMs)) ?? left;
}
