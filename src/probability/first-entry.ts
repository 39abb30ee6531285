import { cross, dot, type Matrix3, norm, rotate, scale, type Vector3 } from '../vector.js';
import { massInBall } from './ball-mass.js';
import { type PathEncounter, type TurningState, turningStateAt } from './encounter-path.js';
import { perpendicularTo } from './encounter-plane.js';
import { inverseOf } from './inverse.js';
import { legendreRule } from './quadrature.js';

/** Between times this far apart the path is interpolated by cubics: far finer than orbits bend. */
const LONGEST_KNOT_MS = 20_000;
const FEWEST_KNOTS = 64;
/** The path is stepped by this part of the hard-body radius or the smallest sigma, whichever is smaller. */
const STEP_PART = 0.5;
const MOST_STEPS = 20_000;
/** Parts of the path whose density is under e^-18 of the largest one add nothing that shows. */
const NEGLIGIBLE_LOG = 18;
/** Of the sum so far: all together what is left out stays below a thousandth of it. */
const NEGLIGIBLE_PART = 1e-10;

/**
 * Probability that the hard body meets the position error at any time, right also where the relative path
 * comes back to where it has been.
 *
 * In the turning axes of object 1 a ball of the hard-body radius moves along the relative path through the
 * space of position errors. An error is met when the ball first reaches it: the probability is the mass in
 * the ball at the start, and the mass that enters through the leading half of its surface, where no earlier
 * part of the path has swept it. The covariance follows the slow turning of object 2 against object 1; that
 * the single error turns with it is left out, which is of the order of (error / orbit radius).
 *
 * @returns `undefined` where the combined covariance is singular
 */
export function firstEntryProbability(encounter: PathEncounter): number | undefined {
  const radius = encounter.hardBodyRadiusM;
  if (radius === 0) return 0;
  const knots = knotsOf(encounter);
  if (knots === undefined) return undefined;
  const segments = segmentsOf(knots, radius);
  const [start] = knots;
  let sum = massInBall(start.positionM, radius, start.covarianceM2, [1, 0, 0], -radius, radius);
  const swept = sweptPath(segments, radius);
  for (const segment of segments) {
    const { from, to, knot } = segment;
    const along: Vector3 = [to[0] - from[0], to[1] - from[1], to[2] - from[2]];
    const length = norm(along);
    if (length > 0) {
      const isSwept = swept.near(segment);
      const { nodes, weights } = leadingHalf(scale(along, 1 / length), radius / knot.smallestSigmaM);
      const area = radius * radius * length;
      for (let i = 0; i < weights.length; i++) {
        const point: Vector3 = [
          from[0] + 0.5 * along[0] + radius * nodes[i][0],
          from[1] + 0.5 * along[1] + radius * nodes[i][1],
          from[2] + 0.5 * along[2] + radius * nodes[i][2],
        ];
        const entering = area * weights[i] * Math.exp(logDensity(knot, point));
        if (entering > NEGLIGIBLE_PART * sum && !isSwept(point)) sum += entering;
      }
    }
    swept.add(segment);
  }
  return Math.min(1, sum);
}

type Knot = TurningState & {
  readonly timeMs: number;
  readonly inverse: Matrix3;
  readonly logNorm: number;
  readonly smallestSigmaM: number;
};

function knotsOf(encounter: PathEncounter): Knot[] | undefined {
  const { fromMs, toMs } = encounter;
  const count = Math.max(FEWEST_KNOTS, Math.ceil((toMs - fromMs) / LONGEST_KNOT_MS));
  const knots: Knot[] = [];
  for (let i = 0; i <= count; i++) {
    const timeMs = fromMs + ((toMs - fromMs) * i) / count;
    const state = turningStateAt(encounter, timeMs);
    const inverted = inverseOf(state.covarianceM2);
    if (inverted === undefined) return undefined;
    const { inverse, determinant } = inverted;
    knots.push({
      ...state,
      timeMs,
      inverse,
      logNorm: -0.5 * Math.log((2 * Math.PI) ** 3 * determinant),
      // The trace of the inverse is at most three times its largest eigenvalue, at least that eigenvalue.
      smallestSigmaM: 1 / Math.sqrt(inverse[0][0] + inverse[1][1] + inverse[2][2]),
    });
  }
  return knots;
}

function logDensity({ inverse, logNorm }: Knot, point: Vector3): number {
  return logNorm - 0.5 * dot(point, rotate(inverse, point));
}

/** The largest density that a point within `reach` of `center` can have. */
function logDensityWithin(
  { inverse, logNorm, smallestSigmaM }: Knot,
  center: Vector3,
  reach: number,
): number {
  const nearest = Math.max(0, Math.sqrt(dot(center, rotate(inverse, center))) - reach / smallestSigmaM);
  return logNorm - 0.5 * nearest * nearest;
}

type Segment = { readonly from: Vector3; readonly to: Vector3; readonly knot: Knot };

/** Short straight pieces of the path, in order of time, where the density counts. */
function segmentsOf(knots: readonly Knot[], radius: number): Segment[] {
  const spans = knots.slice(1).map((right, i) => {
    const left = knots[i];
    const corners = [0, 0.25, 0.5, 0.75, 1].map((part) => between(left, right, part));
    const lengths = corners.slice(1).map((corner, j) => distance(corner, corners[j]));
    return { left, right, corners, length: lengths.reduce((sum, each) => sum + each, 0) };
  });
  const best = spans.map(({ left, corners, length }) =>
    Math.max(...corners.map((corner) => logDensityWithin(left, corner, radius + 0.25 * length))),
  );
  const largest = Math.max(...best);
  const counting = spans.filter((_, i) => best[i] >= largest - NEGLIGIBLE_LOG);
  const whole = counting.reduce((sum, { length }) => sum + length, 0);
  const sigmaM = knots.reduce((least, { smallestSigmaM }) => Math.min(least, smallestSigmaM), radius);
  const stepM = Math.max(STEP_PART * sigmaM, whole / MOST_STEPS);
  return counting.flatMap(({ left, right, length }) => {
    const count = Math.max(1, Math.ceil(length / stepM));
    return Array.from({ length: count }, (_, j) => ({
      from: between(left, right, j / count),
      to: between(left, right, (j + 1) / count),
      knot: left,
    }));
  });
}

/** Cubic through positions and rates of two knots. */
function between(left: Knot, right: Knot, part: number): Vector3 {
  const seconds = (right.timeMs - left.timeMs) / 1000;
  const rest = 1 - part;
  const a = (1 + 2 * part) * rest * rest;
  const b = part * rest * rest * seconds;
  const c = part * part * (3 - 2 * part);
  const d = -part * part * rest * seconds;
  const component = (k: 0 | 1 | 2) =>
    a * left.positionM[k] + b * left.velocityMPerS[k] + c * right.positionM[k] + d * right.velocityMPerS[k];
  return [component(0), component(1), component(2)];
}

/** What the ball has swept so far: capsules about segments, found by cells of space. */
function sweptPath(
  segments: readonly Segment[],
  radius: number,
): {
  readonly near: (segment: Segment) => (point: Vector3) => boolean;
  readonly add: (segment: Segment) => void;
} {
  const longest = segments.reduce((most, { from, to }) => Math.max(most, distance(from, to)), 0);
  const cellM = 2 * radius + longest;
  const cells = new Map<string, Segment[]>();
  const cellOf = ({ from, to }: Segment) =>
    [0, 1, 2].map((k) => Math.floor((0.5 * (from[k] + to[k])) / cellM)) as unknown as Vector3;
  return {
    add: (segment) => {
      const key = cellOf(segment).join();
      const cell = cells.get(key);
      if (cell === undefined) cells.set(key, [segment]);
      else cell.push(segment);
    },
    near: (segment) => {
      const [cx, cy, cz] = cellOf(segment);
      const found: Segment[] = [];
      for (let x = cx - 1; x <= cx + 1; x++)
        for (let y = cy - 1; y <= cy + 1; y++)
          for (let z = cz - 1; z <= cz + 1; z++) found.push(...(cells.get(`${x},${y},${z}`) ?? []));
      // Neighboring points are mostly swept by the same piece.
      let latest = 0;
      return (point) => {
        if (found.length === 0) return false;
        if (isWithin(point, found[latest].from, found[latest].to, radius)) return true;
        const index = found.findIndex(({ from, to }) => isWithin(point, from, to, radius));
        if (index >= 0) latest = index;
        return index >= 0;
      };
    },
  };
}

/** Just inside the radius, so that the rim of the ball is not taken as swept by the piece before. */
const RIM = 1 - 1e-9;

function isWithin(point: Vector3, from: Vector3, to: Vector3, radius: number): boolean {
  const dx = to[0] - from[0];
  const dy = to[1] - from[1];
  const dz = to[2] - from[2];
  const px = point[0] - from[0];
  const py = point[1] - from[1];
  const pz = point[2] - from[2];
  const square = dx * dx + dy * dy + dz * dz;
  const part = square === 0 ? 0 : Math.min(1, Math.max(0, (px * dx + py * dy + pz * dz) / square));
  const x = px - part * dx;
  const y = py - part * dy;
  const z = pz - part * dz;
  return x * x + y * y + z * z < RIM * radius * radius;
}

/** Directions on the leading half of a ball, each weighted by its part of the sphere and its slant. */
function leadingHalf(along: Vector3, radiusInSigmas: number): { nodes: Vector3[]; weights: number[] } {
  const rings = Math.min(32, Math.ceil(8 + 2 * radiusInSigmas));
  const spokes = 2 * rings;
  const first = perpendicularTo(along);
  const second = cross(along, first);
  const rule = legendreRule(rings);
  const nodes: Vector3[] = [];
  const weights: number[] = [];
  for (let i = 0; i < rings; i++) {
    const cosine = 0.5 * (1 + rule.nodes[i]);
    const sine = Math.sqrt(1 - cosine * cosine);
    for (let j = 0; j < spokes; j++) {
      const angle = (2 * Math.PI * (j + 0.5 * (i % 2))) / spokes;
      const u = sine * Math.cos(angle);
      const v = sine * Math.sin(angle);
      nodes.push([
        cosine * along[0] + u * first[0] + v * second[0],
        cosine * along[1] + u * first[1] + v * second[1],
        cosine * along[2] + u * first[2] + v * second[2],
      ]);
      weights.push(0.5 * rule.weights[i] * cosine * ((2 * Math.PI) / spokes));
    }
  }
  return { nodes, weights };
}

function distance(a: Vector3, b: Vector3): number {
  return Math.hypot(a[0] - b[0], a[1] - b[1], a[2] - b[2]);
}
