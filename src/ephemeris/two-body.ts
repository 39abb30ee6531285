import { dot, norm, type Vector3 } from '../vector.js';
import type { OrbitState } from './state.js';

/** IERS Conventions 2010, TT-compatible, km^3/s^2: the states come from messages, not from SGP4 and its WGS-72. */
const MU_KM3_PER_S2 = 398_600.4415;
const MOST_ITERATIONS = 60;

/**
 * Moves a state along its two-body orbit: Kepler's problem in universal variables (Battin; Vallado,
 * "Fundamentals of Astrodynamics and Applications", algorithm 8). Any conic; over some minutes the Earth's
 * flattening adds some tens of meters, much the same for two objects at one place.
 *
 * @param seconds forward or, negative, back
 * @throws RangeError where the iteration does not settle, which a state that is no orbit may bring about
 */
export function moveOnTwoBody(state: OrbitState, seconds: number): OrbitState {
  if (seconds === 0) return state;
  const { positionKm: r0, velocityKmPerS: v0 } = state;
  const radius = norm(r0);
  const rootMu = Math.sqrt(MU_KM3_PER_S2);
  const radialTerm = dot(r0, v0) / rootMu;
  // Reciprocal of the semi-major axis; negative on a hyperbola.
  const alpha = 2 / radius - dot(v0, v0) / MU_KM3_PER_S2;
  let chi = (rootMu * seconds) / radius;
  for (let iteration = 0; iteration < MOST_ITERATIONS; iteration++) {
    const psi = chi * chi * alpha;
    const [c2, c3] = stumpff(psi);
    const r = chi * chi * c2 + radialTerm * chi * (1 - psi * c3) + radius * (1 - psi * c2);
    const late =
      chi ** 3 * c3 + radialTerm * chi * chi * c2 + radius * chi * (1 - psi * c3) - rootMu * seconds;
    const step = late / r;
    chi -= step;
    if (Math.abs(step) < 1e-12 * Math.max(1, Math.abs(chi))) {
      return lagrange(state, chi, chi * chi * alpha, seconds, radius, rootMu);
    }
  }
  throw new RangeError(`two-body motion over ${seconds} s does not settle from ${JSON.stringify(state)}`);
}

function lagrange(
  { positionKm: r0, velocityKmPerS: v0 }: OrbitState,
  chi: number,
  psi: number,
  seconds: number,
  radius: number,
  rootMu: number,
): OrbitState {
  const [c2, c3] = stumpff(psi);
  const f = 1 - (chi * chi * c2) / radius;
  const g = seconds - (chi ** 3 * c3) / rootMu;
  const positionKm = combined(f, r0, g, v0);
  const r = norm(positionKm);
  const fRate = (rootMu / (r * radius)) * chi * (psi * c3 - 1);
  const gRate = 1 - (chi * chi * c2) / r;
  return { positionKm, velocityKmPerS: combined(fRate, r0, gRate, v0) };
}

function combined(f: number, a: Vector3, g: number, b: Vector3): Vector3 {
  return [f * a[0] + g * b[0], f * a[1] + g * b[1], f * a[2] + g * b[2]];
}

/** Stumpff's functions c2 and c3; by their series near 0, where the closed forms cancel. */
function stumpff(psi: number): [c2: number, c3: number] {
  if (psi > 1e-3) {
    const root = Math.sqrt(psi);
    return [(1 - Math.cos(root)) / psi, (root - Math.sin(root)) / (psi * root)];
  }
  if (psi < -1e-3) {
    const root = Math.sqrt(-psi);
    return [(1 - Math.cosh(root)) / psi, (Math.sinh(root) - root) / (-psi * root)];
  }
  return [
    1 / 2 - (psi / 24) * (1 - (psi / 30) * (1 - psi / 56)),
    1 / 6 - (psi / 120) * (1 - (psi / 42) * (1 - psi / 72)),
  ];
}
