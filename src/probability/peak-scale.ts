/** A circle of points, equally spaced, for integrands that are periodic and analytic. */
type Circle = { readonly count: number; readonly cos: Float64Array; readonly sin: Float64Array };

/**
 * Points by how much the exponent varies: found by trial against 256 points over thousands of random encounters,
 * for 1e-11 in the scale. Above the last figure Newton's method from the limit of small discs is not sure to
 * arrive.
 */
const CIRCLES = [
  { upToSpread: 0.01, ...circleOf(8) },
  { upToSpread: 1, ...circleOf(16) },
] as const;
const MOST_STEPS = 8;
/** A step of Newton's method, as a part, whose square is negligible. */
const LAST_STEP = 1e-4;

/**
 * The factor k on both sigmas at which the probability of a disc peaks, for a disc that is small beside the miss
 * and the sigmas at the peak.
 *
 * With both sigmas times k the disc, in sigmas, shrinks by k towards the center of the density, so the rate of its
 * probability is the flow of the density through its circle. At points p of the circle, n the unit vector outward,
 * q the square of p in sigmas and u = 1 / (2 k^2), that rate is 0 where
 *
 *     f(u) = sum of (p . n) exp(-u q) = 0
 *
 * and the probability has a peak there if f falls. For a vanishing disc f is a straight line in u, with its zero at
 * k = (Mahalanobis distance) / sqrt(2): Newton's method in u starts there and hardly needs a second step. All is
 * taken relative to the center of the disc, by expm1, because the large parts of the sum cancel.
 *
 * @param radius greater than 0, less than the distance of the miss
 * @returns within about 1e-8 of k; `undefined` where the disc is too large for this way
 */
export function peakScaleOf(
  sigmaX: number,
  sigmaY: number,
  missX: number,
  missY: number,
  radius: number,
): number | undefined {
  const ratioX = Math.abs(missX) / radius;
  const ratioY = Math.abs(missY) / radius;
  const xx = (radius / sigmaX) ** 2;
  const yy = (radius / sigmaY) ** 2;
  let u = 1 / (xx * ratioX * ratioX + yy * ratioY * ratioY);
  const spread = u * (2 * (xx * ratioX + yy * ratioY) + Math.max(xx, yy));
  const circle = CIRCLES.find(({ upToSpread }) => spread <= upToSpread);
  if (circle === undefined) return undefined;
  const { count, cos, sin } = circle;
  for (let step = 0; step < MOST_STEPS; step++) {
    let sum = 0;
    let slopes = 0;
    for (let j = 0; j < count; j++) {
      const outward = 1 + ratioX * cos[j] + ratioY * sin[j];
      const rise = xx * cos[j] * (2 * ratioX + cos[j]) + yy * sin[j] * (2 * ratioY + sin[j]);
      const change = Math.expm1(-u * rise);
      sum += outward * change;
      slopes += outward * rise * (1 + change);
    }
    const move = (count + sum) / slopes;
    u += move;
    if (!(slopes > 0 && u > 0)) return undefined;
    if (Math.abs(move) <= LAST_STEP * u) return Math.sqrt(0.5 / u);
  }
  return undefined;
}

function circleOf(count: number): Circle {
  const angles = Array.from({ length: count }, (_, j) => (2 * Math.PI * j) / count);
  return { count, cos: Float64Array.from(angles, Math.cos), sin: Float64Array.from(angles, Math.sin) };
}
