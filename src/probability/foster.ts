import { requireFinite, requireNotNegative, requirePositive } from './arguments.js';
import { erf, scaledErfc } from './error-function.js';
import { integrate } from './quadrature.js';
import { LARGEST_VARIATION, smallDiscProbability, variationOver } from './small-disc.js';

/** The encounter plane in the principal axes of the combined covariance; all lengths in meters. */
export type FosterEncounter = {
  /** One-sigma of the combined position error along the first principal axis. */
  readonly sigmaXM: number;
  /** One-sigma along the second principal axis; either of the two may be the larger one. */
  readonly sigmaYM: number;
  /** Miss along the first principal axis; the sign does not matter. */
  readonly missXM: number;
  /** Miss along the second principal axis; the sign does not matter. */
  readonly missYM: number;
  /** Sum of the two objects' hard-body radii. */
  readonly hardBodyRadiusM: number;
};

const SQRT_HALF = Math.SQRT1_2;
const SQRT_TWO_PI = Math.sqrt(2 * Math.PI);
/** Beyond this fall of the integrand's logarithm from its peak, what is left is under 1e-15 of the whole. */
const NEGLIGIBLE_FALL = 38;
/** Of the difference to the coarser rule, which overstates the error by orders of magnitude. */
const RELATIVE_TOLERANCE = 1e-8;

/**
 * Two-dimensional collision probability: the bivariate Gaussian of the combined position error in the
 * encounter plane, integrated over the disc of the combined hard-body radius.
 *
 * Source of the model: J. L. Foster and H. S. Estes, "A Parametric Analysis of Orbital Debris
 * Collision Probability and Maneuver Rate for Space Vehicles", NASA JSC-25898, 1992. It assumes a
 * straight relative path, constant covariance, spherical objects and no velocity error.
 *
 * Method: a Taylor series about the center of the disc where the density varies little over it
 * (`smallDiscProbability`). Elsewhere one axis is integrated in closed form (a difference of error functions,
 * formed without cancellation), the other numerically over the angle around the disc. That integrand is
 * periodic and analytic, so that equally spaced angles converge exponentially; where the disc spans many
 * sigmas it is instead integrated adaptively between the points at which it has become negligible. The
 * relative error is below 1e-9 for any aspect ratio and size of the disc as long as the inputs themselves
 * determine the figure that well; below about 1e-308 the result loses digits and ends at 0.
 *
 * @returns probability from 0 to 1
 * @throws RangeError if a sigma is not positive, the radius is negative, or any argument is not finite
 */
export function fosterProbability(encounter: FosterEncounter): number {
  const { sigmaXM, sigmaYM, missXM, missYM, hardBodyRadiusM } = encounter;
  requirePositive('sigmaXM', sigmaXM);
  requirePositive('sigmaYM', sigmaYM);
  requireFinite('missXM', missXM);
  requireFinite('missYM', missYM);
  requireNotNegative('hardBodyRadiusM', hardBodyRadiusM);
  return discProbability(sigmaXM, sigmaYM, missXM, missYM, hardBodyRadiusM);
}

/** `fosterProbability` without the checks, for callers that have made them. */
export function discProbability(
  sigmaX: number,
  sigmaY: number,
  missX: number,
  missY: number,
  radius: number,
): number {
  if (radius === 0) return 0;
  // The closed form goes along the axis with the smaller sigma: what is left to integrate is smoother.
  const swap = sigmaX < sigmaY;
  const missWide = Math.abs(swap ? missY : missX);
  const missNarrow = Math.abs(swap ? missX : missY);
  const sigmaWide = swap ? sigmaY : sigmaX;
  const sigmaNarrow = swap ? sigmaX : sigmaY;
  const x = missWide / sigmaWide;
  const y = missNarrow / sigmaNarrow;
  const variation = variationOver(x, y, radius / sigmaWide, radius / sigmaNarrow);
  if (variation <= LARGEST_VARIATION) {
    return smallDiscProbability(x, y, radius / sigmaWide, radius / sigmaNarrow, variation);
  }
  const distance = Math.hypot(missX, missY);
  // A sigma below the rounding of the lengths counts as that rounding.
  const least = 1e-13 * (radius + distance);
  const wide = Math.max(sigmaWide, least);
  const narrow = Math.max(sigmaNarrow, least);
  if (distance - radius > CERTAIN_SIGMAS * wide) return 0;
  if (radius - distance > CERTAIN_SIGMAS * wide) return 1;
  // How strongly the exponent of the Gaussian varies over the disc decides how many angles it takes.
  const a = radius / wide;
  const b = radius / narrow;
  const spread = a * (missWide / wide) + b * (missNarrow / narrow) + a * a + b * b;
  if (spread <= MAX_SPREAD) return overEqualAngles(wide, narrow, missWide, missNarrow, radius, spread);
  return overSignificantAngles(wide, narrow, missWide, missNarrow, radius);
}

/** exp(-40^2 / 2) is below the smallest double. */
const CERTAIN_SIGMAS = 40;
/** Up to here equal angles are the faster way. */
const MAX_SPREAD = 10_000;

/** Points at the midpoints of equal steps from 0 to pi; the rule is exact for trigonometric sums. */
type Angles = { readonly cos: Float64Array; readonly sin: Float64Array };
const ANGLES = new Map<number, Angles>();

function anglesOf(count: number): Angles {
  let angles = ANGLES.get(count);
  if (angles === undefined) {
    const at = (j: number) => ((j + 0.5) * Math.PI) / count;
    const half = Array.from({ length: count / 2 }, (_, j) => at(j));
    angles = { cos: Float64Array.from(half, Math.cos), sin: Float64Array.from(half, Math.sin) };
    ANGLES.set(count, angles);
  }
  return angles;
}

function overEqualAngles(
  wide: number,
  narrow: number,
  missWide: number,
  missNarrow: number,
  radius: number,
  spread: number,
): number {
  // Exponents varying by s over the circle need some sqrt(s) angles; the factors were found by trial, for
  // 1e-11 with a margin.
  const count = 2 * Math.ceil(4 + 2.2 * Math.sqrt(spread));
  const { cos, sin } = anglesOf(count);
  const center = missNarrow / narrow;
  const atCenter = Math.exp(-0.5 * center * center) / SQRT_TWO_PI;
  const middle = missWide / wide;
  const a = radius / wide;
  const b = radius / narrow;
  let sum = 0;
  for (let j = 0; j < count / 2; j++) {
    const x1 = middle - a * cos[j];
    const x2 = middle + a * cos[j];
    const half = b * sin[j];
    const mass =
      half <= 1 && half * center <= 1
        ? atCenter * 2 * half * hermiteSum(center, half)
        : intervalMass(center, half, center - half);
    sum += sin[j] * mass * (Math.exp(-0.5 * x1 * x1) + Math.exp(-0.5 * x2 * x2));
  }
  return Math.min(1, ((Math.PI / count) * a * sum) / SQRT_TWO_PI);
}

/**
 * Mass of the standard normal distribution within `half` of `center` >= 0, over 2 `half` times the
 * density at `center`: the Taylor series about the center, sum of He_2k(c) h^2k / (2k+1)!.
 */
function hermiteSum(center: number, half: number): number {
  const square = half * half;
  const slope = center * half;
  // He_n(c) h^n by the three-term recurrence of the Hermite polynomials.
  let even = 1;
  let odd = slope;
  let factorial = 1;
  let sum = 1;
  for (let n = 2; n < 40; n += 2) {
    even = slope * odd - (n - 1) * square * even;
    odd = slope * even - n * square * odd;
    factorial /= n * (n + 1);
    const term = even * factorial;
    sum += term;
    // A Hermite polynomial may vanish, two that follow each other not both.
    if (Math.abs(term) + Math.abs(odd) * factorial < 1e-17) break;
  }
  return sum;
}

/**
 * Mass of the standard normal distribution within `half` of `center` >= 0; `near` is `center` - `half`,
 * handed over because the caller may know it better than the subtraction gives it.
 */
function intervalMass(center: number, half: number, near: number): number {
  const outside = Math.max(0, near);
  return Math.exp(-0.5 * outside * outside) * scaledIntervalMass(center, half, near);
}

/** The same mass over exp(-`near`^2 / 2), if `near` is positive: neither underflow nor cancellation. */
function scaledIntervalMass(center: number, half: number, near: number): number {
  const far = center + half;
  if (near <= 0) return 0.5 * (erf(far * SQRT_HALF) + erf(-near * SQRT_HALF));
  if (half * center <= 1 && half <= 1) {
    return (Math.exp(half * (0.5 * half - center)) / SQRT_TWO_PI) * 2 * half * hermiteSum(center, half);
  }
  const drop = Math.exp(-2 * half * center);
  return 0.5 * (scaledErfc(near * SQRT_HALF) - drop * scaledErfc(far * SQRT_HALF));
}

/**
 * The integral where the disc spans many sigmas. The angle counts from the edge of the disc that lies
 * nearest to the center of the Gaussian in the wide axis, so that thin slices there keep their digits.
 *
 * The integrand, seen as a function of x, is a marginal of a log-concave function times the half chord,
 * which is concave: it is log-concave itself (Prekopa), hence has one peak, and beyond the point at which
 * it has fallen by a factor e^-38 it falls at least exponentially.
 */
function overSignificantAngles(
  wide: number,
  narrow: number,
  missWide: number,
  missNarrow: number,
  radius: number,
): number {
  const edgeX = missWide - radius;
  const edgeY = missNarrow - radius;
  const center = missNarrow / narrow;

  // Written by `evaluate`: minus the exponent, and the factor in front of exp.
  let exponent = 0;
  let factor = 0;
  const evaluate = (angle: number): void => {
    const sin = Math.sin(angle);
    const sinHalf = Math.sin(0.5 * angle);
    const sinRest = Math.sin(0.5 * (0.5 * Math.PI - angle));
    const x = (edgeX + 2 * radius * sinHalf * sinHalf) / wide;
    const near = (edgeY + 2 * radius * sinRest * sinRest) / narrow;
    const outside = Math.max(0, near);
    exponent = 0.5 * (x * x + outside * outside);
    factor = sin * scaledIntervalMass(center, (radius * sin) / narrow, near);
  };
  const logarithm = (angle: number): number => {
    evaluate(angle);
    return Math.log(factor) - exponent;
  };

  const peak = maximize(logarithm, 0, Math.PI);
  const atPeak = logarithm(peak);
  const exponentAtPeak = exponent;
  if (atPeak === Number.NEGATIVE_INFINITY) return 0;
  const start = whereFallen(logarithm, peak, 0, atPeak - NEGLIGIBLE_FALL);
  const end = whereFallen(logarithm, peak, Math.PI, atPeak - NEGLIGIBLE_FALL);

  const integrand = (angle: number): number => {
    evaluate(angle);
    return factor * Math.exp(exponentAtPeak - exponent);
  };
  // The mass of the slice rises from 0 to 1 within a few sigmas about the angles at which the half chord
  // equals the miss; far apart scales like these are found by splitting there, not by luck.
  const bounds = [start, peak, end];
  for (const sigmas of [-6, -2, 2, 6]) {
    const rise = Math.asin((missNarrow + sigmas * narrow) / radius);
    for (const angle of [rise, Math.PI - rise]) if (angle > start && angle < end) bounds.push(angle);
  }
  bounds.sort((one, other) => one - other);
  const sum = integrate(integrand, bounds, RELATIVE_TOLERANCE);
  return Math.min(1, ((sum * radius) / wide / SQRT_TWO_PI) * Math.exp(-exponentAtPeak));
}

/**
 * Golden-section search in a function with one peak, whose logarithm of 0 at both ends is minus infinity.
 * Ends within a factor e of the peak value: the peak is only a point to split at.
 */
function maximize(f: (x: number) => number, from: number, to: number): number {
  const ratio = 0.5 * (Math.sqrt(5) - 1);
  let low = from;
  let high = to;
  let fLow = Number.NEGATIVE_INFINITY;
  let fHigh = Number.NEGATIVE_INFINITY;
  let x1 = high - ratio * (high - low);
  let x2 = low + ratio * (high - low);
  let f1 = f(x1);
  let f2 = f(x2);
  for (let i = 0; i < 90 && Math.max(f1, f2) - Math.min(fLow, fHigh) > 1; i++) {
    if (f1 < f2) {
      low = x1;
      fLow = f1;
      x1 = x2;
      f1 = f2;
      x2 = low + ratio * (high - low);
      f2 = f(x2);
    } else {
      high = x2;
      fHigh = f2;
      x2 = x1;
      f2 = f1;
      x1 = high - ratio * (high - low);
      f1 = f(x1);
    }
  }
  return f1 > f2 ? x1 : x2;
}

/** The point between `peak` and `limit` at which `f` has fallen to `level`, from outside, within a tenth. */
function whereFallen(f: (x: number) => number, peak: number, limit: number, level: number): number {
  let outer = limit;
  let inner = peak;
  if (f(outer) >= level) return outer;
  for (let i = 0; i < 60 && Math.abs(outer - inner) > 0.1 * Math.abs(outer - peak); i++) {
    const middle = 0.5 * (outer + inner);
    if (f(middle) < level) outer = middle;
    else inner = middle;
  }
  return outer;
}
