import type { OrbitState } from '../../src/ephemeris/state.js';
import { dot, norm, type Vector3 } from '../../src/vector.js';

const GRAVITATIONAL_PARAMETER = 398_600.8;

/**
 * Two-body motion through a state by Lagrange's f and g in the difference of eccentric anomaly (any textbook
 * of celestial mechanics); elliptic orbits only.
 */
export function twoBody(initial: OrbitState): (seconds: number) => OrbitState {
  const { positionKm: r0, velocityKmPerS: v0 } = initial;
  const distance = norm(r0);
  const a = 1 / (2 / distance - dot(v0, v0) / GRAVITATIONAL_PARAMETER);
  const n = Math.sqrt(GRAVITATIONAL_PARAMETER / a ** 3);
  const sigma = dot(r0, v0) / Math.sqrt(GRAVITATIONAL_PARAMETER * a);
  const combine = (f: number, g: number): Vector3 => [
    f * r0[0] + g * v0[0],
    f * r0[1] + g * v0[1],
    f * r0[2] + g * v0[2],
  ];
  return (seconds) => {
    const meanChange = n * seconds;
    let x = meanChange;
    for (let i = 0; i < 50; i++) {
      const value = x - (1 - distance / a) * Math.sin(x) + sigma * (1 - Math.cos(x)) - meanChange;
      const slope = 1 - (1 - distance / a) * Math.cos(x) + sigma * Math.sin(x);
      const step = value / slope;
      x -= step;
      if (Math.abs(step) < 1e-15) break;
    }
    const cosine = 2 * Math.sin(x / 2) ** 2;
    const positionKm = combine(1 - (a / distance) * cosine, seconds - (x - Math.sin(x)) / n);
    const now = norm(positionKm);
    const velocityKmPerS = combine(
      (-Math.sqrt(GRAVITATIONAL_PARAMETER * a) / (now * distance)) * Math.sin(x),
      1 - (a / now) * cosine,
    );
    return { positionKm, velocityKmPerS };
  };
}

/** A state on a circular orbit of this radius in the x-y plane, at the x axis. */
export function circular(radiusKm: number): OrbitState {
  return {
    positionKm: [radiusKm, 0, 0],
    velocityKmPerS: [0, Math.sqrt(GRAVITATIONAL_PARAMETER / radiusKm), 0],
  };
}
