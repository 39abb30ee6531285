import { rtnFrame } from '../ephemeris/rtn-frame.js';
import { dot, type Matrix3, norm, rotate, scale, subtract, type Vector3 } from '../vector.js';
import { requirePositive, shown } from './arguments.js';
import { type PathEncounter, requirePathEncounter } from './encounter-path.js';
import { normalGenerator, uniformGenerator } from './random.js';

export type MonteCarloResult = {
  /** Part of the samples that came within the hard-body radius. */
  readonly probability: number;
  /** Ends of the 99 % confidence interval of the probability (E. B. Wilson, 1927). */
  readonly low: number;
  readonly high: number;
  readonly hits: number;
  readonly samples: number;
};

/** Two-sided 99 % of the standard normal distribution. */
const Z_99 = 2.5758293035489004;
/** Errors beyond this many sigmas are not looked for; one in 1e15 is larger. */
const FARTHEST_SIGMAS = 8;
/** The polygon that stands for the path stays within this part of the radius. */
const POLYGON_TOLERANCE = 0.01;
const MAX_HALVINGS = 22;
const LONGEST_PIECE_MS = 300_000;

/**
 * Probability of a collision by trying: position errors of both objects are drawn from their covariances,
 * kept constant in the RTN of each object (see `PathEncounter` on what that says about velocities), and
 * moved along the true relative path; a sample counts when it comes within the hard-body radius at any
 * time from `fromMs` to `toMs`. The same seed gives the same result.
 *
 * @param samples how many errors are drawn
 * @param seed any integer
 * @throws RangeError for a number of samples that is not a positive integer, or a wrong encounter
 */
export function monteCarlo(encounter: PathEncounter, samples: number, seed: number): MonteCarloResult {
  requirePathEncounter(encounter);
  requirePositive('samples', samples);
  if (!Number.isInteger(samples)) throw new RangeError(`samples must be a whole number, got ${samples}`);
  if (!Number.isInteger(seed)) throw new RangeError(`seed must be a whole number, got ${shown(seed)}`);
  const { covariance1RtnM2, covariance2RtnM2, hardBodyRadiusM } = encounter;
  const reachM =
    FARTHEST_SIGMAS * (Math.sqrt(traceOf(covariance1RtnM2)) + Math.sqrt(traceOf(covariance2RtnM2))) +
    hardBodyRadiusM;
  const segments = polygonOf(encounter, reachM);
  const root1 = choleskyOf(covariance1RtnM2);
  const root2 = choleskyOf(covariance2RtnM2);
  const normal = normalGenerator(uniformGenerator(seed));
  const draw = (root: Matrix3): Vector3 => {
    const z: Vector3 = [normal(), normal(), normal()];
    return [dot(root[0], z), dot(root[1], z), dot(root[2], z)];
  };
  let hits = 0;
  for (let i = 0; i < samples; i++) {
    const error1 = draw(root1);
    const error2 = draw(root2);
    if (segments.some((segment) => passesWithin(segment, error1, error2, hardBodyRadiusM))) hits++;
  }
  return { hits, samples, ...wilson(hits, samples) };
}

/** One corner of the path in the axes of object 1's RTN, and object 2's RTN in the same axes. */
type Corner = { readonly timeMs: number; readonly positionM: Vector3; readonly frame2: Matrix3 };
type Segment = readonly [Corner, Corner];

/** Straight pieces close to the path, where any error within reach could lead to a hit. */
function polygonOf(encounter: PathEncounter, reachM: number): Segment[] {
  const cornerAt = (timeMs: number): Corner => {
    const { object1, object2 } = encounter.statesAt(timeMs);
    const frame1 = rtnFrame(object1.positionKm, object1.velocityKmPerS);
    const frame2 = rtnFrame(object2.positionKm, object2.velocityKmPerS);
    return {
      timeMs,
      positionM: scale(rotate(frame1, subtract(object2.positionKm, object1.positionKm)), 1000),
      frame2: [rotate(frame1, frame2[0]), rotate(frame1, frame2[1]), rotate(frame1, frame2[2])],
    };
  };
  const toleranceM = POLYGON_TOLERANCE * encounter.hardBodyRadiusM;
  const segments: Segment[] = [];
  const divide = (start: Corner, end: Corner, halvings: number): void => {
    const middle = cornerAt(0.5 * (start.timeMs + end.timeMs));
    const chord = scale(subtract(end.positionM, start.positionM), 0.5);
    const sag = norm(subtract(middle.positionM, scale(addition(start.positionM, end.positionM), 0.5)));
    // Twice the sag and half the chord bound how far the piece strays from its middle.
    if (norm(middle.positionM) - norm(chord) - 2 * sag > reachM) return;
    // An error of object 2 turns with its frame: as the arc of a circle of the reach.
    const turn =
      norm(subtract(end.frame2[0], start.frame2[0])) + norm(subtract(end.frame2[1], start.frame2[1]));
    if ((sag <= toleranceM && reachM * turn * turn <= 8 * toleranceM) || halvings === 0) {
      segments.push([start, middle], [middle, end]);
      return;
    }
    divide(start, middle, halvings - 1);
    divide(middle, end, halvings - 1);
  };
  // A whole revolution could look like no motion at all: start from pieces of a fraction of one.
  const marks = new Set([encounter.fromMs, encounter.tcaMs, encounter.toMs]);
  for (let t = encounter.fromMs; t < encounter.toMs; t += LONGEST_PIECE_MS) marks.add(t);
  const corners = [...marks].sort((one, other) => one - other).map(cornerAt);
  if (corners.length === 1) return [[corners[0], corners[0]]];
  for (let i = 0; i + 1 < corners.length; i++) divide(corners[i], corners[i + 1], MAX_HALVINGS);
  return segments;
}

function passesWithin([start, end]: Segment, error1: Vector3, error2: Vector3, radiusM: number): boolean {
  const x0 = displaced(start, error1, error2, 0);
  const y0 = displaced(start, error1, error2, 1);
  const z0 = displaced(start, error1, error2, 2);
  const dx = displaced(end, error1, error2, 0) - x0;
  const dy = displaced(end, error1, error2, 1) - y0;
  const dz = displaced(end, error1, error2, 2) - z0;
  const square = dx * dx + dy * dy + dz * dz;
  const along = square === 0 ? 0 : Math.min(1, Math.max(0, -(x0 * dx + y0 * dy + z0 * dz) / square));
  const x = x0 + along * dx;
  const y = y0 + along * dy;
  const z = z0 + along * dz;
  return x * x + y * y + z * z <= radiusM * radiusM;
}

function displaced({ positionM, frame2 }: Corner, error1: Vector3, error2: Vector3, k: 0 | 1 | 2): number {
  return (
    positionM[k] + frame2[0][k] * error2[0] + frame2[1][k] * error2[1] + frame2[2][k] * error2[2] - error1[k]
  );
}

/** Lower triangular root of a positive semidefinite matrix; columns without variance are 0. */
function choleskyOf(matrix: Matrix3): Matrix3 {
  const root = [
    [0, 0, 0],
    [0, 0, 0],
    [0, 0, 0],
  ] as [[number, number, number], [number, number, number], [number, number, number]];
  for (let j = 0; j < 3; j++) {
    const rest = matrix[j][j] - root[j][0] ** 2 - root[j][1] ** 2;
    root[j][j] = rest > 1e-12 * matrix[j][j] ? Math.sqrt(rest) : 0;
    for (let i = j + 1; i < 3; i++) {
      const left = matrix[i][j] - root[i][0] * root[j][0] - root[i][1] * root[j][1];
      root[i][j] = root[j][j] === 0 ? 0 : left / root[j][j];
    }
  }
  return root;
}

function wilson(hits: number, samples: number): { probability: number; low: number; high: number } {
  const probability = hits / samples;
  const square = Z_99 * Z_99;
  const center = probability + square / (2 * samples);
  const half = Z_99 * Math.sqrt((probability * (1 - probability) + square / (4 * samples)) / samples);
  const whole = 1 + square / samples;
  return {
    probability,
    low: hits === 0 ? 0 : (center - half) / whole,
    high: hits === samples ? 1 : (center + half) / whole,
  };
}

function traceOf(matrix: Matrix3): number {
  return matrix[0][0] + matrix[1][1] + matrix[2][2];
}

function addition(a: Vector3, b: Vector3): Vector3 {
  return [a[0] + b[0], a[1] + b[1], a[2] + b[2]];
}
