/** Up to this `variation` ten terms of the series do. */
export const LARGEST_VARIATION = 4;
/** Of the first term left out. */
const NEGLIGIBLE_TERM = 1e-13;
/** Above the n-th root of (2n-1)!! up to n = 11. */
const LARGEST_MOMENT = 8.4;

/**
 * How much the density of the bivariate normal distribution varies over a disc: `smallDiscProbability` is for up to
 * `LARGEST_VARIATION`. NaN or infinite where the arguments are too far apart for a figure.
 *
 * @param x,y center of the disc, in sigmas
 * @param a,b radius of the disc, in sigmas of the first and of the second axis
 */
export function variationOver(x: number, y: number, a: number, b: number): number {
  return a * a * (x * x + LARGEST_MOMENT) + b * b * (y * y + LARGEST_MOMENT);
}

/**
 * Mass of the bivariate normal distribution in a disc over which its density varies little: the Taylor series
 * about the center of the disc, integrated over the disc term by term (own derivation). With He the Hermite
 * polynomials,
 *
 *     P = a b / 2 exp(-(x^2 + y^2) / 2) * sum over n of (sum over i + j = n of A_i B_j) / (n + 1)!
 *     A_i = He_2i(x) (a/2)^2i / i!,  B_j = He_2j(y) (b/2)^2j / j!
 *
 * What is left out has a bound. He_n(x) is the mean of (x + i Z)^n over a standard normal Z, which makes term n the
 * mean of (r/2)^2n / (n! (n+1)!) with r^2 = a^2 (x + i Z1)^2 + b^2 (y + i Z2)^2. By Minkowski's inequality that is
 * at most (v/4)^n / (n! (n+1)!) with v = a^2 x^2 + b^2 y^2 + (a^2 + b^2) ((2n-1)!!)^(1/n), which is at most the
 * variation. By Jensen's inequality the whole sum is at least exp(-(a^2 + b^2) / 8), above 0.9.
 *
 * @param variation as `variationOver` gives it, at most `LARGEST_VARIATION`
 */
export function smallDiscProbability(x: number, y: number, a: number, b: number, variation: number): number {
  const sA = 0.25 * a * a;
  const sB = 0.25 * b * b;
  const tA = sA * x * x;
  const tB = sB * y * y;
  let sum = 1;
  let bound = 1;
  let factorial = 1;
  for (let n = 1; ; n++) {
    bound *= (0.25 * variation) / (n * (n + 1));
    if (bound < NEGLIGIBLE_TERM) break;
    // He_2n by the two before it, which leaves out the odd ones.
    const slope = 4 * n - 3;
    const back = 4 * n - 6;
    A[n + 1] = ((tA - slope * sA) * A[n] - back * sA * sA * A[n - 1]) / n;
    B[n + 1] = ((tB - slope * sB) * B[n] - back * sB * sB * B[n - 1]) / n;
    factorial *= n + 1;
    let term = 0;
    for (let i = 0; i <= n; i++) term += A[i + 1] * B[n - i + 1];
    sum += term / factorial;
  }
  return 0.5 * a * b * Math.exp(-0.5 * (x * x + y * y)) * sum;
}

/** 0 to start from, A_0 = 1, A_1 and so on; likewise B. Kept, because two arrays for each disc would be garbage. */
const A = Float64Array.of(0, 1, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0);
const B = Float64Array.from(A);
