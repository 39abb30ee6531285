import { gravityAlong } from './gravity.js';

/** Doubles of one segment: eight coefficients for each of x, y, z. */
export const SEGMENT_SIZE = 24;

const startRates = new Float64Array(6);
const endRates = new Float64Array(6);

/**
 * Fits a polynomial of degree seven between two SGP4 states: position and velocity from SGP4, acceleration
 * and its derivative from gravity with J2 (Hermite interpolation of four derivatives at both ends).
 * For a two-body orbit the error is that of Hermite interpolation, max|r^(8)| (h/2)^8 / 8!.
 *
 * @param states x, y, z (km) and vx, vy, vz (km/s) of both ends, at `start` and at `end`
 * @param lengthS time between them, seconds
 * @param out coefficients of u = (t - t0) / lengthS, lowest power first, from `offset` on
 */
export function fitSegment(
  states: Float64Array,
  start: number,
  end: number,
  lengthS: number,
  out: Float64Array,
  offset: number,
): void {
  gravityAlong(states, start, startRates);
  gravityAlong(states, end, endRates);
  const h = lengthS;
  const h2 = h * h;
  const h3 = h2 * h;
  for (let axis = 0; axis < 3; axis++) {
    const c0 = states[start + axis];
    const c1 = states[start + 3 + axis] * h;
    const c2 = (startRates[axis] * h2) / 2;
    const c3 = (startRates[3 + axis] * h3) / 6;
    const p = states[end + axis] - c0 - c1 - c2 - c3;
    const v = states[end + 3 + axis] * h - c1 - 2 * c2 - 3 * c3;
    const a = endRates[axis] * h2 - 2 * c2 - 6 * c3;
    const j = endRates[3 + axis] * h3 - 6 * c3;
    const at = offset + 8 * axis;
    out[at] = c0;
    out[at + 1] = c1;
    out[at + 2] = c2;
    out[at + 3] = c3;
    out[at + 4] = 35 * p - 15 * v + 2.5 * a - j / 6;
    out[at + 5] = -84 * p + 39 * v - 7 * a + j / 2;
    out[at + 6] = 70 * p - 34 * v + 6.5 * a - j / 2;
    out[at + 7] = -20 * p + 10 * v - 2 * a + j / 6;
  }
}

/**
 * Position and velocity on a segment.
 *
 * @param u (t - t0) / length; beyond 0 to 1 it extrapolates
 * @param perLength 1 / length, per second
 * @param out x, y, z (km) and vx, vy, vz (km/s) from `outOffset` on
 */
export function evaluateSegment(
  coefficients: Float64Array,
  offset: number,
  u: number,
  perLength: number,
  out: Float64Array,
  outOffset: number,
): void {
  for (let axis = 0; axis < 3; axis++) {
    const at = offset + 8 * axis;
    const c1 = coefficients[at + 1];
    const c2 = coefficients[at + 2];
    const c3 = coefficients[at + 3];
    const c4 = coefficients[at + 4];
    const c5 = coefficients[at + 5];
    const c6 = coefficients[at + 6];
    const c7 = coefficients[at + 7];
    out[outOffset + axis] =
      coefficients[at] + u * (c1 + u * (c2 + u * (c3 + u * (c4 + u * (c5 + u * (c6 + u * c7))))));
    out[outOffset + 3 + axis] =
      perLength *
      (c1 + u * (2 * c2 + u * (3 * c3 + u * (4 * c4 + u * (5 * c5 + u * (6 * c6 + u * 7 * c7))))));
  }
}
