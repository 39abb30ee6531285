import { describe, expect, it } from 'vitest';
import { SLAB_S, segmentsPerSlab, TWO_BODY_REACH } from '../../src/ephemeris/node-spacing.js';
import { EARTH_RADIUS_KM, MU } from './motion-under-gravity.js';

type Plane = readonly [number, number];

/** State of a two-body orbit in its plane, `seconds` after perigee: Kepler's equation by bisection. */
function keplerState(e: number, perigeeKm: number, seconds: number): { r: Plane; v: Plane } {
  const parabola = e > 0.9999;
  if (parabola) {
    // Barker's equation: D + D^3 / 3 = sqrt(mu / (2 q^3)) t, D the tangent of half the true anomaly.
    const reach = Math.sqrt(MU / (2 * perigeeKm ** 3)) * seconds;
    const d = bisect((x) => x + x ** 3 / 3 - reach, -50, 50);
    const r = perigeeKm * (1 + d * d);
    const speed = Math.sqrt((2 * MU) / perigeeKm) / (1 + d * d);
    return { r: [perigeeKm * (1 - d * d), 2 * perigeeKm * d], v: [(-d * speed * r) / r, speed] };
  }
  const a = perigeeKm / (1 - e);
  const n = Math.sqrt(MU / a ** 3);
  const anomaly = bisect((x) => x - e * Math.sin(x) - n * seconds, n * seconds - 1.1, n * seconds + 1.1);
  const [cosine, sine] = [Math.cos(anomaly), Math.sin(anomaly)];
  const b = a * Math.sqrt(1 - e * e);
  const rate = n / (1 - e * cosine);
  return { r: [a * (cosine - e), b * sine], v: [-a * sine * rate, b * cosine * rate] };
}

function bisect(value: (x: number) => number, from: number, to: number): number {
  let [low, high] = [from, to];
  for (let k = 0; k < 80; k++) {
    const middle = (low + high) / 2;
    if (value(middle) < 0) low = middle;
    else high = middle;
  }
  return (low + high) / 2;
}

/** Value, slope, second and third derivative of one axis of a two-body orbit. */
function derivatives({ r, v }: { r: Plane; v: Plane }, axis: 0 | 1): number[] {
  const distance = Math.hypot(...r);
  const rDotV = r[0] * v[0] + r[1] * v[1];
  return [
    r[axis],
    v[axis],
    (-MU * r[axis]) / distance ** 3,
    -MU * (v[axis] / distance ** 3 - (3 * rDotV * r[axis]) / distance ** 5),
  ];
}

/** Hermite's interpolation by divided differences over fourfold nodes at 0 and 1, at `u`. */
function hermite(start: readonly number[], end: readonly number[], lengthS: number, u: number): number {
  const factorial = [1, 1, 2, 6];
  const nodes = [0, 0, 0, 0, 1, 1, 1, 1];
  const at = (node: number, order: number) =>
    ((node === 0 ? start : end)[order] * lengthS ** order) / factorial[order];
  const differences = nodes.map((node) => at(node, 0));
  const top = [differences[0]];
  for (let order = 1; order < nodes.length; order++) {
    for (let k = 0; k + order < nodes.length; k++) {
      const gap = nodes[k + order] - nodes[k];
      differences[k] = gap === 0 ? at(nodes[k], order) : (differences[k + 1] - differences[k]) / gap;
    }
    top.push(differences[0]);
  }
  return top.reduceRight((sum, coefficient, k) => sum * (u - nodes[k]) + coefficient, 0);
}

/** Worst error over the segment and its place on the orbit, as part of the perigee distance. */
function worstError(e: number, angle: number): number {
  const perigeeKm = 7000;
  const lengthS = angle / Math.sqrt((MU * (1 + e)) / perigeeKm ** 3);
  let worst = 0;
  for (let phase = -0.5; phase <= 0.5; phase += 0.05) {
    const fromS = (phase - 0.5) * lengthS;
    const start = keplerState(e, perigeeKm, fromS);
    const end = keplerState(e, perigeeKm, fromS + lengthS);
    for (let u = 0.1; u < 0.95; u += 0.1) {
      const { r } = keplerState(e, perigeeKm, fromS + u * lengthS);
      const off = ([0, 1] as const).map(
        (axis) => hermite(derivatives(start, axis), derivatives(end, axis), lengthS, u) - r[axis],
      );
      worst = Math.max(worst, Math.hypot(...off) / perigeeKm);
    }
  }
  return worst;
}

describe('node spacing', () => {
  it.each(TWO_BODY_REACH)('the table of reaches, worked out again from Kepler: e = %d', (e, angle) => {
    // The error goes with the eighth power: half a percent of angle is 4 percent of error.
    expect(worstError(e, angle) / 1e-5).toBeGreaterThan(0.9);
    expect(worstError(e, angle) / 1e-5).toBeLessThan(1.1);
  });

  it('cuts a slab into segments of whole milliseconds, more of them for faster perigees', () => {
    let before = 0;
    for (const perigeeKm of [42_164, 20_000, 8000, 7000, 6600]) {
      const count = segmentsPerSlab(0.001, perigeeKm);
      expect(Number.isInteger((SLAB_S * 1000) / count / 2)).toBe(true);
      expect(count).toBeGreaterThanOrEqual(before);
      before = count;
    }
    expect(segmentsPerSlab(0.7, 6700)).toBeGreaterThan(segmentsPerSlab(0.001, 6700));
  });

  it('keeps the two-body error under 100 m', () => {
    for (const e of [0.0001, 0.01, 0.1, 0.3, 0.6, 0.74]) {
      for (const heightKm of [250, 550, 1000, 2000]) {
        const perigeeKm = EARTH_RADIUS_KM + heightKm;
        const lengthS = SLAB_S / segmentsPerSlab(e, perigeeKm);
        const angle = lengthS * Math.sqrt((MU * (1 + e)) / perigeeKm ** 3);
        expect(worstError(e, angle) * perigeeKm).toBeLessThan(0.1);
      }
    }
  });
});
