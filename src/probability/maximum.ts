import { discProbability, type FosterEncounter, fosterProbability } from './foster.js';
import { peakScaleOf } from './peak-scale.js';

export type MaximumProbability = {
  /** Largest probability over all scales of the sigmas. */
  readonly probability: number;
  /**
   * The factor on both sigmas at which it is reached: above 1, more uncertainty would raise the figure;
   * below 1, the figure is diluted: it is small because the sigmas are large.
   */
  readonly sigmaScale: number;
};

const STEP = 0.25;
const LOG_SCALE_TOLERANCE = 1e-6;

/**
 * The largest two-dimensional collision probability when both sigmas are multiplied by a common factor k
 * (the combined covariance by k^2), k from 0 to infinity, and the k that gives it.
 *
 * With the miss outside the hard-body radius the probability vanishes at both ends and has its peak in
 * between; for a small disc at k = (Mahalanobis distance) / sqrt(2) (S. Alfano, "Relating Position
 * Uncertainty to Maximum Conjunction Probability", Journal of the Astronautical Sciences 53, 2005). With
 * the miss inside the radius it rises to 1 as k goes to 0, and with the miss on the circle to 1/2: these
 * limits are returned with `sigmaScale` 0. A radius of 0 gives probability 0 at the limit of small discs.
 *
 * For a small disc the peak is where the rate of the probability is 0 (`peakScaleOf`), for others it is searched
 * for. That there is one peak only is taken from trial, not proved.
 *
 * @throws RangeError as `fosterProbability`
 */
export function maximumProbability(encounter: FosterEncounter): MaximumProbability {
  const given = fosterProbability(encounter);
  const { sigmaXM, sigmaYM, missXM, missYM, hardBodyRadiusM } = encounter;
  return peakProbability(sigmaXM, sigmaYM, missXM, missYM, hardBodyRadiusM, given);
}

/**
 * `maximumProbability` without the checks, for callers that have made them.
 *
 * @param given the probability with the sigmas as they are
 */
export function peakProbability(
  sigmaX: number,
  sigmaY: number,
  missX: number,
  missY: number,
  radius: number,
  given: number,
): MaximumProbability {
  if (radius === 0) {
    return { probability: 0, sigmaScale: Math.hypot(missX / sigmaX, missY / sigmaY) * Math.SQRT1_2 };
  }
  const distance = Math.hypot(missX, missY);
  if (distance < radius) return { probability: 1, sigmaScale: 0 };
  if (distance === radius) return { probability: 0.5, sigmaScale: 0 };

  const atScale = (scale: number) => discProbability(sigmaX * scale, sigmaY * scale, missX, missY, radius);
  const sigmaScale =
    peakScaleOf(sigmaX, sigmaY, missX, missY, radius) ??
    climbToPeak(atScale, Math.hypot(missX / sigmaX, missY / sigmaY), radius / distance);
  const probability = atScale(sigmaScale);
  return given > probability ? { probability: given, sigmaScale: 1 } : { probability, sigmaScale };
}

/** @param ratio radius over distance of the miss */
function climbToPeak(atScale: (scale: number) => number, mahalanobis: number, ratio: number): number {
  // Along one direction from the center the disc spans r1 to r2 and exp(-r1^2/2k^2) - exp(-r2^2/2k^2)
  // peaks at k^2 = (r2^2 - r1^2) / (2 ln(r2^2/r1^2)); the direction of the miss is a good first guess.
  const logRatio = 2 * Math.log((1 + ratio) / (1 - ratio));
  const squares = logRatio > 1e-6 && Number.isFinite(logRatio) ? (4 * ratio) / logRatio : 1;
  const start = Math.log(mahalanobis) + 0.5 * Math.log(0.5 * squares);
  return Math.exp(climb((logScale) => atScale(Math.exp(logScale)), start));
}

/** Where a function with one peak has it: brackets it from `start`, then Brent's method. */
function climb(f: (x: number) => number, start: number): number {
  let step = STEP;
  let x = start;
  let value = f(x);
  let left = x - step;
  let right = x + step;
  let fLeft = f(left);
  let fRight = f(right);
  for (let i = 0; i < 200 && (fLeft > value || fRight > value); i++) {
    step *= 1.6;
    if (fRight > fLeft) {
      left = x;
      x = right;
      value = fRight;
      right = x + step;
      fRight = f(right);
      fLeft = Number.NEGATIVE_INFINITY;
    } else {
      right = x;
      x = left;
      value = fLeft;
      left = x - step;
      fLeft = f(left);
      fRight = Number.NEGATIVE_INFINITY;
    }
  }
  return brent(f, left, x, right, value);
}

/**
 * Brent's maximization: parabolas through the three best points, golden section where they fail
 * (R. P. Brent, Algorithms for Minimization without Derivatives, Prentice-Hall 1973, chapter 5).
 */
function brent(f: (x: number) => number, from: number, guess: number, to: number, atGuess: number): number {
  const golden = 0.5 * (3 - Math.sqrt(5));
  let low = from;
  let high = to;
  let x = guess;
  let second = guess;
  let third = guess;
  let fx = atGuess;
  let fSecond = atGuess;
  let fThird = atGuess;
  let step = 0;
  let before = 0;
  for (let i = 0; i < 100; i++) {
    const middle = 0.5 * (low + high);
    if (Math.abs(x - middle) <= 2 * LOG_SCALE_TOLERANCE - 0.5 * (high - low)) break;
    const r = (x - second) * (fx - fThird);
    const q = (x - third) * (fx - fSecond);
    let above = (x - third) * q - (x - second) * r;
    let below = 2 * (q - r);
    if (below > 0) above = -above;
    below = Math.abs(below);
    if (
      Math.abs(before) > LOG_SCALE_TOLERANCE &&
      Math.abs(above) < Math.abs(0.5 * below * before) &&
      above > below * (low - x) &&
      above < below * (high - x)
    ) {
      before = step;
      step = above / below;
    } else {
      before = x < middle ? high - x : low - x;
      step = golden * before;
    }
    const next =
      x +
      (Math.abs(step) >= LOG_SCALE_TOLERANCE ? step : step > 0 ? LOG_SCALE_TOLERANCE : -LOG_SCALE_TOLERANCE);
    const fNext = f(next);
    if (fNext >= fx) {
      if (next < x) high = x;
      else low = x;
      third = second;
      fThird = fSecond;
      second = x;
      fSecond = fx;
      x = next;
      fx = fNext;
    } else {
      if (next < x) low = next;
      else high = next;
      if (fNext >= fSecond || second === x) {
        third = second;
        fThird = fSecond;
        second = next;
        fSecond = fNext;
      } else if (fNext >= fThird || third === x || third === second) {
        third = next;
        fThird = fNext;
      }
    }
  }
  return x;
}
