import { describe, expect, it } from 'vitest';
import { massInBall } from '../../src/probability/ball-mass.js';
import { type PathEncounter, turningStateAt } from '../../src/probability/encounter-path.js';
import { perpendicularTo } from '../../src/probability/encounter-plane.js';
import { firstEntryProbability } from '../../src/probability/first-entry.js';
import { inverseOf } from '../../src/probability/inverse.js';
import { legendreRule } from '../../src/probability/quadrature.js';
import { cross, dot, norm, rotate, scale, subtract, type Vector3 } from '../../src/vector.js';
import { encounterOf, TCA_MS } from './slow-encounters.js';

const RINGS = 16;

/**
 * The same by a plain evaluation: chords between true states at even times, with the true covariance of each,
 * and each of 512 points of the leading half held against every earlier chord.
 */
function plainEvaluation(encounter: PathEncounter, chords: number): number {
  const { fromMs, toMs, hardBodyRadiusM: radius } = encounter;
  const corners = Array.from(
    { length: chords + 1 },
    (_, i) => turningStateAt(encounter, fromMs + ((toMs - fromMs) * i) / chords).positionM,
  );
  const { positionM, covarianceM2 } = turningStateAt(encounter, fromMs);
  let sum = massInBall(positionM, radius, covarianceM2, [0, 1, 0], -radius, radius);
  const rule = legendreRule(RINGS);
  for (let i = 0; i < chords; i++) {
    const way = subtract(corners[i + 1], corners[i]);
    const length = norm(way);
    const along = scale(way, 1 / length);
    const first = perpendicularTo(along);
    const second = cross(along, first);
    const inverted = inverseOf(
      turningStateAt(encounter, fromMs + ((toMs - fromMs) * (i + 0.5)) / chords).covarianceM2,
    );
    if (inverted === undefined) throw new Error('singular');
    const { inverse, determinant } = inverted;
    const middle = scale([0, 1, 2].map((k) => corners[i][k] + corners[i + 1][k]) as unknown as Vector3, 0.5);
    const near = corners
      .slice(0, i)
      .map((from, j) => ({ from, way: subtract(corners[j + 1], from) }))
      .filter((chord) => distanceFrom(middle, chord) < 2 * radius);
    for (let ring = 0; ring < RINGS; ring++) {
      const cosine = 0.5 * (1 + rule.nodes[ring]);
      const sine = Math.sqrt(1 - cosine * cosine);
      for (let spoke = 0; spoke < 2 * RINGS; spoke++) {
        const angle = (Math.PI * (spoke + 0.25)) / RINGS;
        const [u, v] = [sine * Math.cos(angle), sine * Math.sin(angle)];
        const point = [0, 1, 2].map(
          (k) => middle[k] + radius * (cosine * along[k] + u * first[k] + v * second[k]),
        ) as unknown as Vector3;
        if (near.some((chord) => distanceFrom(point, chord) < radius * (1 - 1e-9))) continue;
        const density =
          Math.exp(-0.5 * dot(point, rotate(inverse, point))) / Math.sqrt((2 * Math.PI) ** 3 * determinant);
        const area = 0.5 * rule.weights[ring] * (Math.PI / RINGS) * radius * radius;
        sum += area * cosine * length * density;
      }
    }
  }
  return sum;
}

function distanceFrom([x, y, z]: Vector3, { from, way }: { from: Vector3; way: Vector3 }): number {
  const [ox, oy, oz] = [x - from[0], y - from[1], z - from[2]];
  const part = Math.min(1, Math.max(0, (ox * way[0] + oy * way[1] + oz * way[2]) / dot(way, way)));
  return Math.sqrt((ox - part * way[0]) ** 2 + (oy - part * way[1]) ** 2 + (oz - part * way[2]) ** 2);
}

const SIGMA_1 = [100, 300, 100] as const;
const SIGMA_2 = [80, 400, 120] as const;

describe('firstEntryProbability', () => {
  it.each<[string, PathEncounter, number]>([
    [
      'reversing on its own track',
      encounterOf([0, 100, 0], [0, -0.02, 0], [30, 60, 20], [30, 60, 20], 30, 90),
      500,
    ],
    [
      'reversing beside its track',
      encounterOf([0, 100, 20], [0, -0.01, 0.01], [30, 60, 20], [30, 60, 20], 30, 90),
      500,
    ],
    [
      'hopping along the orbit',
      encounterOf([10, 100, 0], [-0.1, -0.02, 0], [10, 20, 10], [10, 20, 10], 30, 45),
      300,
    ],
    ['looping back', encounterOf([50, 0, 0], [0, -0.0809, 0.02], [20, 40, 20], [20, 40, 20], 40, 90), 500],
    [
      'in a wide bow in the orbital plane',
      encounterOf([40, 60, 0], [0.03, -0.2, 0], [60, 200, 60], [50, 200, 60], 15, 80),
      500,
    ],
    [
      'inside the radius all the time',
      encounterOf([3, 2, 1], [0.001, 0.002, 0], [12, 20, 12], [9, 15, 12], 40, 20),
      60,
    ],
    [
      'cut off in the middle',
      { ...encounterOf([30, 0, 20], [3, 0.5, 4], SIGMA_1, SIGMA_2, 50, 20), toMs: TCA_MS },
      600,
    ],
    [
      'far out in the tail',
      encounterOf([60, 100, 120], [0, -0.11, 0.01], [12, 60, 20], [12, 60, 20], 20, 90),
      500,
    ],
    [
      'head on, the covariance turning while it is passed through',
      encounterOf([2000, 0, 500], [0, -14_900, 900], [700, 90_000, 700], [900, 120_000, 900], 10, 3),
      1800,
    ],
  ])('agrees with a plain evaluation: %s', (_, encounter, chords) => {
    const found = firstEntryProbability(encounter) ?? Number.NaN;
    expect(Math.abs(found / plainEvaluation(encounter, chords) - 1)).toBeLessThan(1e-3);
  });

  it('is certain where a radius of thirty sigmas goes over the error', () => {
    const encounter = encounterOf([5, 0, 0], [0, -0.02, 0.01], [0.7, 0.7, 0.7], [0.7, 0.7, 0.7], 30, 90);
    expect(firstEntryProbability(encounter)).toBeCloseTo(1, 3);
  });
});
