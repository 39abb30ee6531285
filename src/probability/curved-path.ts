import { dot, norm, rotate, scale, type Vector3 } from '../vector.js';
import { massInBall } from './ball-mass.js';
import { densityOf, logDensityWithin } from './density.js';
import { type PathEncounter, requirePathEncounter, turningStateAt } from './encounter-path.js';
import { encounterPlane } from './encounter-plane.js';
import { firstEntryProbability } from './first-entry.js';
import { discProbability } from './foster.js';
import { inverseOf } from './inverse.js';
import { integrate } from './quadrature.js';

const SQRT_TWO_PI = Math.sqrt(2 * Math.PI);
const RELATIVE_TOLERANCE = 1e-4;
/** Of a rule with the next finer one, which then was right to 1e-6 for thousands of encounters of a real catalog ... */
const RULES_AGREE = 1e-5;
/** ... and of the two finest, if none has agreed so well: the error of the last is far smaller. */
const FINEST_AGREE = 3e-3;
/** First interval about closest approach, in passages of one sigma, and the growth of the ones after it. */
const FIRST_INTERVAL = 1;
const INTERVAL_GROWTH = 4;
/** A density above this part of the largest one on the path counts when the path is asked for its bends. */
const COUNTING_DENSITY = 1e-3;
/** A path that never turns by more than this (60 degrees) from its densest point can't come back on itself. */
const LEAST_COSINE = 0.5;
/** Part of the sum that the ends of the window may have before the tubes' blunt ends show. */
const LARGEST_END_PART = 0.01;

/** An end below this part of the rest is left out. */
const NEGLIGIBLE_END = 1e-9;

type HermiteRule = { readonly nodes: readonly number[]; readonly weights: readonly number[] };

/** Gauss-Hermite rules for the weight exp(-x^2) (Abramowitz and Stegun, table 25.10; digits from NumPy). */
const HERMITE_5: HermiteRule = {
  nodes: [-2.0201828704560856, -0.9585724646138185, 0, 0.9585724646138185, 2.0201828704560856],
  weights: [
    0.019953242059045917, 0.3936193231522411, 0.9453087204829418, 0.3936193231522411, 0.019953242059045917,
  ],
};
const HERMITE_9: HermiteRule = {
  nodes: [
    -3.1909932017815277, -2.266580584531843, -1.468553289216668, -0.7235510187528376, 0, 0.7235510187528376,
    1.468553289216668, 2.266580584531843, 3.1909932017815277,
  ],
  weights: [
    3.9606977263264365e-5, 0.004943624275536941, 0.08847452739437664, 0.43265155900255564, 0.720235215606051,
    0.43265155900255564, 0.08847452739437664, 0.004943624275536941, 3.9606977263264365e-5,
  ],
};
const HERMITE_15: HermiteRule = {
  nodes: [
    -4.499990707309392, -3.6699503734044527, -2.967166927905603, -2.325732486173858, -1.7199925751864888,
    -1.1361155852109206, -0.5650695832555758, 0, 0.5650695832555758, 1.1361155852109206, 1.7199925751864888,
    2.325732486173858, 2.967166927905603, 3.6699503734044527, 4.499990707309392,
  ],
  weights: [
    1.522475804253521e-9, 1.0591155477110625e-6, 0.00010000444123249982, 0.002778068842912775,
    0.0307800338725461, 0.15848891579593571, 0.4120286874988987, 0.5641003087264174, 0.4120286874988987,
    0.15848891579593571, 0.0307800338725461, 0.002778068842912775, 0.00010000444123249982,
    1.0591155477110625e-6, 1.522475804253521e-9,
  ],
};

export type CurvedPathResult = {
  /** From 0 to 1. */
  readonly probability: number;
  /** `FIRST-ENTRY` where adjoining tubes would count the same errors more than once, or the window ends inside. */
  readonly method: 'ADJOINING-TUBES' | 'FIRST-ENTRY';
  /** What adjoining tubes give, their end caps included, not bounded by 1: an expected number of passages. */
  readonly tubes: number;
  /** Cosine of the largest turn of the path where the density counts; below 0.5 it may come back on itself. */
  readonly leastCosine: number;
};

/**
 * Collision probability along the true, curved relative path, the covariance of each object turning with its
 * own RTN (see `PathEncounter` on what is assumed of the errors).
 *
 * Method: adjoining tubes. The path is cut into short pieces; each piece with its hard-body circle is a
 * tube, whose probability is the two-dimensional one of the plane across the piece times the one-dimensional
 * one between its ends, in the space where the combined covariance is a unit sphere (S. Alfano, "Addressing
 * Nonlinear Relative Motion for Spacecraft Collision Probability", AIAA 2006-6760; R. P. Patera, "Satellite
 * Collision Probability for Nonlinear Relative Motion", Journal of Guidance, Control, and Dynamics 26(5),
 * 2003). Here the pieces are made infinitely short, so that the sum is an integral over time, and the half
 * balls at both ends of the window are added. For a straight path this is exactly `fosterProbability`.
 *
 * Limits of the method: tubes count an error once for every time the path comes by, and leave small gaps
 * and overlaps on either side of a bend, of second order in (radius over radius of curvature). Where the
 * path turns by more than 60 degrees while the density counts, or the window begins or ends inside the
 * density, the probability is therefore taken from `firstEntryProbability`, which counts each error once.
 *
 * @returns `undefined` where the combined covariance is singular
 * @throws RangeError for times out of order, or a covariance or radius that is none
 */
export function curvedPathProbability(encounter: PathEncounter): CurvedPathResult | undefined {
  requirePathEncounter(encounter);
  const { fromMs, tcaMs, toMs, hardBodyRadiusM } = encounter;
  const atTca = turningStateAt(encounter, tcaMs);
  if (inverseOf(atTca.covarianceM2) === undefined) return undefined;

  const seen: { readonly density: number; readonly direction: Vector3 }[] = [];
  const flux = (timeMs: number): number => {
    const { positionM, velocityMPerS, covarianceM2 } = turningStateAt(encounter, timeMs);
    const plane = encounterPlane(positionM, velocityMPerS, covarianceM2);
    const inverse = inverseOf(covarianceM2)?.inverse;
    if (plane === undefined || inverse === undefined) return 0;
    const toward = rotate(inverse, velocityMPerS);
    // Speed and place along the path in the space where the combined covariance is a unit sphere.
    const rate = Math.sqrt(dot(velocityMPerS, toward));
    const along = dot(positionM, toward) / rate;
    const across = discProbability(plane.sigmaXM, plane.sigmaYM, plane.missXM, plane.missYM, hardBodyRadiusM);
    const density = (across * Math.exp(-0.5 * along * along)) / SQRT_TWO_PI;
    seen.push({ density, direction: scale(velocityMPerS, 1 / norm(velocityMPerS)) });
    return (density * rate) / 1000;
  };
  const along =
    singlePassage(flux, encounter, atTca) ??
    integrate(flux, intervalsOf(encounter, atTca), RELATIVE_TOLERANCE);
  const ends =
    halfBall(encounter, fromMs, -hardBodyRadiusM, 0, along) +
    halfBall(encounter, toMs, 0, hardBodyRadiusM, along);
  const tubes = along + ends;
  const leastCosine = leastCosineOf(seen);
  if (leastCosine >= LEAST_COSINE && ends <= LARGEST_END_PART * tubes) {
    return { probability: Math.min(1, tubes), method: 'ADJOINING-TUBES', tubes, leastCosine };
  }
  const probability = firstEntryProbability(encounter);
  return probability === undefined ? undefined : { probability, method: 'FIRST-ENTRY', tubes, leastCosine };
}

/**
 * The integral for a path that goes through the covariance once and bends little in it: the flux then is
 * nearly a Gaussian in time, for which Gauss-Hermite quadrature takes few points. Two rules that follow each
 * other must agree, and lie inside the window.
 *
 * @returns `undefined` where they do not
 */
function singlePassage(
  flux: (timeMs: number) => number,
  { fromMs, tcaMs, toMs }: PathEncounter,
  { positionM, velocityMPerS, covarianceM2 }: ReturnType<typeof turningStateAt>,
): number | undefined {
  const inverse = inverseOf(covarianceM2)?.inverse;
  if (inverse === undefined) return undefined;
  const toward = rotate(inverse, velocityMPerS);
  const perMs = Math.sqrt(dot(velocityMPerS, toward)) / 1000;
  const centerMs = tcaMs - dot(positionM, toward) / (1000 * perMs * perMs);
  const sum = ({ nodes, weights }: HermiteRule): number | undefined => {
    let total = 0;
    for (let i = 0; i < nodes.length; i++) {
      const timeMs = centerMs + (Math.SQRT2 * nodes[i]) / perMs;
      if (!(timeMs >= fromMs && timeMs <= toMs)) return undefined;
      total += weights[i] * Math.exp(nodes[i] * nodes[i]) * flux(timeMs);
    }
    return (Math.SQRT2 / perMs) * total;
  };
  const coarse = sum(HERMITE_5);
  const middle = coarse === undefined ? undefined : sum(HERMITE_9);
  if (coarse === undefined || middle === undefined) return undefined;
  if (Math.abs(middle - coarse) <= RULES_AGREE * middle) return middle;
  const fine = sum(HERMITE_15);
  return fine !== undefined && Math.abs(fine - middle) <= FINEST_AGREE * fine ? fine : undefined;
}

/** Ends of intervals that grow away from closest approach, so that a short passage in a long window is found. */
function intervalsOf(
  { fromMs, tcaMs, toMs, hardBodyRadiusM }: PathEncounter,
  { velocityMPerS, covarianceM2 }: ReturnType<typeof turningStateAt>,
): number[] {
  const speed = norm(velocityMPerS);
  const sigmaM = Math.sqrt(dot(velocityMPerS, rotate(covarianceM2, velocityMPerS))) / speed;
  const bounds = new Set([fromMs, tcaMs, toMs]);
  let away = (1000 * FIRST_INTERVAL * (sigmaM + hardBodyRadiusM)) / speed;
  // Without relative speed `away` is not finite, and the window is one interval on either side.
  while (tcaMs - away > fromMs || tcaMs + away < toMs) {
    bounds.add(Math.max(fromMs, tcaMs - away));
    bounds.add(Math.min(toMs, tcaMs + away));
    away *= INTERVAL_GROWTH;
  }
  return [...bounds].sort((one, other) => one - other);
}

/**
 * Mass in the part of the ball behind (negative limits) or ahead of the plane in which its tube ends.
 *
 * @param rest what it is added to: 0 comes back for what does not show beside it
 */
function halfBall(
  encounter: PathEncounter,
  timeMs: number,
  fromM: number,
  toM: number,
  rest: number,
): number {
  const { positionM, velocityMPerS, covarianceM2 } = turningStateAt(encounter, timeMs);
  const radius = encounter.hardBodyRadiusM;
  const density = densityOf(covarianceM2);
  if (density === undefined) return 0;
  const most = ((4 * Math.PI) / 3) * radius ** 3 * Math.exp(logDensityWithin(density, positionM, radius));
  if (most < NEGLIGIBLE_END * rest) return 0;
  const direction: Vector3 = norm(velocityMPerS) > 0 ? rotate(density.inverse, velocityMPerS) : [1, 0, 0];
  return massInBall(positionM, radius, covarianceM2, direction, fromM, toM);
}

function leastCosineOf(seen: readonly { readonly density: number; readonly direction: Vector3 }[]): number {
  const densest = seen.reduce((best, each) => (each.density > best.density ? each : best), seen[0]);
  if (densest === undefined) return 1;
  return seen
    .filter(({ density }) => density > COUNTING_DENSITY * densest.density)
    .reduce((least, { direction }) => Math.min(least, dot(direction, densest.direction)), 1);
}
