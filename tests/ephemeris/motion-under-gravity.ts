import type { Random } from '../synthetic/random.js';

/** WGS-72 (Vallado et al., AIAA 2006-6753). */
export const MU = 398_600.8;
export const EARTH_RADIUS_KM = 6378.135;
export const J2 = 0.001_082_616;

/** Potential of a point mass with J2, km^2/s^2 (Vallado, Fundamentals of Astrodynamics, 8.6: degree two). */
export function potential(x: number, y: number, z: number): number {
  const r = Math.hypot(x, y, z);
  const sine = z / r;
  return (MU / r) * (1 - J2 * (EARTH_RADIUS_KM / r) ** 2 * (1.5 * sine * sine - 0.5));
}

/** Acceleration in components, Vallado 8.6.2: written apart from the code under test. */
export function acceleration([x, y, z]: readonly number[]): [number, number, number] {
  const r = Math.hypot(x, y, z);
  const flat = 1.5 * J2 * (EARTH_RADIUS_KM / r) ** 2;
  const sine2 = (z / r) ** 2;
  const central = -MU / r ** 3;
  return [
    central * x * (1 + flat * (1 - 5 * sine2)),
    central * y * (1 + flat * (1 - 5 * sine2)),
    central * z * (1 + flat * (3 - 5 * sine2)),
  ];
}

/** Moves x, y, z, vx, vy, vz by `seconds` (either way) with Runge and Kutta's fourth-order steps of `stepS` at most. */
export function move(state: readonly number[], seconds: number, stepS = 2): number[] {
  const steps = Math.max(1, Math.ceil(Math.abs(seconds) / stepS));
  const h = seconds / steps;
  const rate = (s: readonly number[]) => [s[3], s[4], s[5], ...acceleration(s)];
  const along = (s: readonly number[], k: readonly number[], by: number) => s.map((v, i) => v + by * k[i]);
  let now = [...state];
  for (let n = 0; n < steps; n++) {
    const k1 = rate(now);
    const k2 = rate(along(now, k1, h / 2));
    const k3 = rate(along(now, k2, h / 2));
    const k4 = rate(along(now, k3, h));
    now = now.map((v, i) => v + (h / 6) * (k1[i] + 2 * k2[i] + 2 * k3[i] + k4[i]));
  }
  return now;
}

/** State at a true anomaly on an orbit turned at random. */
export function stateOnOrbit(
  random: Random,
  perigeeKm: number,
  eccentricity: number,
  anomaly: number,
): number[] {
  const p = perigeeKm * (1 + eccentricity);
  const r = p / (1 + eccentricity * Math.cos(anomaly));
  const speed = Math.sqrt(MU / p);
  const plane = [r * Math.cos(anomaly), r * Math.sin(anomaly)];
  const velocity = [-speed * Math.sin(anomaly), speed * (eccentricity + Math.cos(anomaly))];
  const inclination = Math.acos(random.between(-1, 1));
  const node = random.between(0, 2 * Math.PI);
  const perigee = random.between(0, 2 * Math.PI);
  const turn = ([a, b]: readonly number[]) => {
    const x = a * Math.cos(perigee) - b * Math.sin(perigee);
    const y = a * Math.sin(perigee) + b * Math.cos(perigee);
    const yTilted = y * Math.cos(inclination);
    return [
      x * Math.cos(node) - yTilted * Math.sin(node),
      x * Math.sin(node) + yTilted * Math.cos(node),
      y * Math.sin(inclination),
    ];
  };
  return [...turn(plane), ...turn(velocity)];
}
