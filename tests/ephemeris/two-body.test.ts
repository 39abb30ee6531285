import { describe, expect, it } from 'vitest';
import { moveOnTwoBody } from '../../src/ephemeris/two-body.js';
import { cross, dot, norm, scale, subtract } from '../../src/vector.js';

const MU = 398_600.4415;

describe('moveOnTwoBody', () => {
  it('meets example 2-4 of Vallado, Fundamentals of Astrodynamics and Applications (from memory)', () => {
    const moved = moveOnTwoBody(
      { positionKm: [1131.34, -2282.343, 6672.423], velocityKmPerS: [-5.64305, 4.30333, 2.42879] },
      40 * 60,
    );
    [-4219.7527, 4363.0292, -3958.7666].forEach((value, i) => {
      expect(moved.positionKm[i]).toBeCloseTo(value, 2);
    });
    [3.689866, -1.916735, -6.112511].forEach((value, i) => {
      expect(moved.velocityKmPerS[i]).toBeCloseTo(value, 5);
    });
  });

  it.each([
    ['low circular', [7000, 0, 0], [0, 7.5, 1], 3000],
    ['eccentric', [6800, 100, 0], [-0.5, 10, 0.3], 20_000],
    ['hyperbolic', [7000, 0, 1000], [1, 12, 0], -900],
    ['almost at rest in time', [7000, 0, 0], [0, 7.5, 1], 1e-3],
  ] as const)('keeps energy and momentum and comes back: %s', (_, position, velocity, seconds) => {
    const start = { positionKm: position, velocityKmPerS: velocity };
    const end = moveOnTwoBody(start, seconds);
    const energy = (s: typeof start) => dot(s.velocityKmPerS, s.velocityKmPerS) / 2 - MU / norm(s.positionKm);
    expect(energy(end as typeof start)).toBeCloseTo(energy(start), 9);
    const momentum = cross(start.positionKm, start.velocityKmPerS);
    expect(norm(subtract(cross(end.positionKm, end.velocityKmPerS), momentum)) / norm(momentum)).toBeLessThan(
      1e-12,
    );
    const back = moveOnTwoBody(end, -seconds);
    expect(norm(subtract(back.positionKm, start.positionKm))).toBeLessThan(1e-6);
  });

  it('accelerates by gravity: second difference of positions against -mu r / r^3', () => {
    const start = { positionKm: [7000, 1200, -300], velocityKmPerS: [-1, 7.1, 1.4] } as const;
    const [before, after] = [moveOnTwoBody(start, -1), moveOnTwoBody(start, 1)];
    const second = subtract(
      subtract(after.positionKm, start.positionKm),
      subtract(start.positionKm, before.positionKm),
    );
    const gravity = scale(start.positionKm, -MU / norm(start.positionKm) ** 3);
    expect(norm(subtract(second, gravity))).toBeLessThan(1e-7);
  });
});
