import type { Vector3 } from '../vector.js';
import type { OrbitState } from './state.js';

const RADIANS_PER_ARCSECOND = Math.PI / 648_000;
const ARCSECONDS_PER_TURN = 1_296_000;
const J2000_MS = Date.UTC(2000, 0, 1, 12);
const MS_PER_CENTURY = 36_525 * 86_400_000;
/**
 * TT - UTC since 2017: 32.184 s and the 37 leap seconds of IERS Bulletin C. Taken for all times: a second
 * more or less turns the frame by two millionths of an arcsecond, a tenth of a millimeter in low orbit.
 */
const TT_MINUS_UTC_MS = 69_184;

/**
 * The largest terms of the IAU 1980 theory of nutation (Seidelmann, Celestial Mechanics 27, 1982; IERS
 * Technical Note 21, table 5.1), down to 0.0015" in longitude: multiples of D, l', l, F and the node, then
 * longitude and its change a century (sine), obliquity and its change a century (cosine), in 0.0001".
 */
const NUTATION_TERMS = [
  [0, 0, 0, 0, 1, -171_996, -174.2, 92_025, 8.9],
  [-2, 0, 0, 2, 2, -13_187, -1.6, 5736, -3.1],
  [0, 0, 0, 2, 2, -2274, -0.2, 977, -0.5],
  [0, 0, 0, 0, 2, 2062, 0.2, -895, 0.5],
  [0, 1, 0, 0, 0, 1426, -3.4, 54, -0.1],
  [0, 0, 1, 0, 0, 712, 0.1, -7, 0],
  [-2, 1, 0, 2, 2, -517, 1.2, 224, -0.6],
  [0, 0, 0, 2, 1, -386, -0.4, 200, 0],
  [0, 0, 1, 2, 2, -301, 0, 129, -0.1],
  [-2, -1, 0, 2, 2, 217, -0.5, -95, 0.3],
  [-2, 0, 1, 0, 0, -158, 0, -1, 0],
  [-2, 0, 0, 2, 1, 129, 0.1, -70, 0],
  [0, 0, -1, 2, 2, 123, 0, -53, 0],
  [0, 0, 1, 0, 1, 63, 0.1, -33, 0],
  [2, 0, 0, 0, 0, 63, 0, -2, 0],
  [2, 0, -1, 2, 2, -59, 0, 26, 0],
  [0, 0, -1, 0, 1, -58, -0.1, 32, 0],
  [0, 0, 1, 2, 1, -51, 0, 27, 0],
  [-2, 0, 2, 0, 0, 48, 0, 1, 0],
  [0, 0, -2, 2, 1, 46, 0, -24, 0],
  [2, 0, 0, 2, 2, -38, 0, 16, 0],
  [0, 0, 2, 2, 2, -31, 0, 13, 0],
  [0, 0, 2, 0, 0, 29, 0, -1, 0],
  [-2, 0, 1, 2, 2, 29, 0, -12, 0],
  [0, 0, 0, 2, 0, 26, 0, -1, 0],
  [-2, 0, 0, 2, 0, -22, 0, 0, 0],
  [0, 0, -1, 2, 1, 21, 0, -10, 0],
  [0, 2, 0, 0, 0, 17, -0.1, 0, 0],
  [2, 0, -1, 0, 1, 16, 0, -8, 0],
  [-2, 2, 0, 2, 2, -16, 0.1, 7, 0],
  [0, 1, 0, 0, 1, -15, 0, 9, 0],
] as const;

/**
 * Turns a state from TEME of date, the frame of SGP4, into EME2000, the mean equator and equinox of J2000:
 * equation of the equinoxes (IAU 1994), nutation (IAU 1980) and precession (IAU 1976), each as in Vallado,
 * Fundamentals of Astrodynamics and Applications, 4th edition, 3.7. TEME counts as inertial: its slow turn
 * adds less than 0.1 mm/s to a velocity in low orbit.
 *
 * The terms of nutation left out come to 0.005" at most from 1990 to 2060: 0.17 m in low orbit, 1 m in
 * geosynchronous orbit, the same turn for both objects of an encounter. The theory of 1980 itself is off
 * by some 0.06" (2 m in low orbit), which EME2000 carries by convention.
 *
 * @param state in TEME, km and km/s
 * @param utcMs the time of the state, milliseconds of UTC since 1970-01-01
 * @returns the state in EME2000, km and km/s
 */
export function temeToEme2000(state: OrbitState, utcMs: number): OrbitState {
  if (!Number.isFinite(utcMs)) throw new RangeError(`${utcMs} is no time`);
  const t = (utcMs + TT_MINUS_UTC_MS - J2000_MS) / MS_PER_CENTURY;
  const polynomial = (linear: number, square: number, cube: number) =>
    ((cube * t + square) * t + linear) * t * RADIANS_PER_ARCSECOND;
  const zeta = polynomial(2306.2181, 0.301_88, 0.017_998);
  const theta = polynomial(2004.3109, -0.426_65, -0.041_833);
  const z = polynomial(2306.2181, 1.094_68, 0.018_203);
  const obliquity = 84_381.448 * RADIANS_PER_ARCSECOND + polynomial(-46.815, -0.000_59, 0.001_813);
  const { longitude, obliquityChange, node } = nutation(t);
  const equationOfEquinoxes =
    longitude * Math.cos(obliquity) +
    (0.002_64 * Math.sin(node) + 0.000_063 * Math.sin(2 * node)) * RADIANS_PER_ARCSECOND;

  const turn = (v: Vector3): Vector3 => {
    const trueEquinox = aboutZ(v, -equationOfEquinoxes);
    const meanOfDate = aboutX(
      aboutZ(aboutX(trueEquinox, obliquity + obliquityChange), longitude),
      -obliquity,
    );
    return aboutZ(aboutY(aboutZ(meanOfDate, z), -theta), zeta);
  };
  return { positionKm: turn(state.positionKm), velocityKmPerS: turn(state.velocityKmPerS) };
}

/** Nutation in longitude and obliquity and the mean longitude of the lunar node, radians; `t` in centuries of TT. */
function nutation(t: number): { longitude: number; obliquityChange: number; node: number } {
  const argument = (start: number, turns: number, linear: number, square: number, cube: number) =>
    (start + ((turns * ARCSECONDS_PER_TURN + linear) * t + square * t * t + cube * t * t * t)) *
    RADIANS_PER_ARCSECOND;
  const elongation = argument(1_072_261.307, 1236, 1_105_601.328, -6.891, 0.019);
  const sunAnomaly = argument(1_287_099.804, 99, 1_292_581.224, -0.577, -0.012);
  const moonAnomaly = argument(485_866.733, 1325, 715_922.633, 31.31, 0.064);
  const moonLatitude = argument(335_778.877, 1342, 295_263.137, -13.257, 0.011);
  const node = argument(450_160.28, -5, -482_890.539, 7.455, 0.008);
  let longitude = 0;
  let obliquityChange = 0;
  for (const [d, s, m, f, n, sine, sineRate, cosine, cosineRate] of NUTATION_TERMS) {
    const angle = d * elongation + s * sunAnomaly + m * moonAnomaly + f * moonLatitude + n * node;
    longitude += (sine + sineRate * t) * Math.sin(angle);
    obliquityChange += (cosine + cosineRate * t) * Math.cos(angle);
  }
  const scale = RADIANS_PER_ARCSECOND / 10_000;
  return { longitude: longitude * scale, obliquityChange: obliquityChange * scale, node };
}

/** The components of `v` in axes turned by `angle` about the first axis. */
function aboutX([x, y, z]: Vector3, angle: number): Vector3 {
  const c = Math.cos(angle);
  const s = Math.sin(angle);
  return [x, c * y + s * z, c * z - s * y];
}

function aboutY([x, y, z]: Vector3, angle: number): Vector3 {
  const c = Math.cos(angle);
  const s = Math.sin(angle);
  return [c * x - s * z, y, s * x + c * z];
}

function aboutZ([x, y, z]: Vector3, angle: number): Vector3 {
  const c = Math.cos(angle);
  const s = Math.sin(angle);
  return [c * x + s * y, c * y - s * x, z];
}
