import { describe, expect, it } from 'vitest';
import { assessEncounter, type Encounter, type EncounterObject, fosterProbability } from '../../src/index.js';
import type { Matrix3, Vector3 } from '../../src/vector.js';

const DIAGONAL = (r: number, t: number, n: number): Matrix3 => [
  [r * r, 0, 0],
  [0, t * t, 0],
  [0, 0, n * n],
];

// Two circular orbits at a right angle to each other: object 1 moves along +y, object 2 along +z.
const object1: EncounterObject = {
  positionKm: [7000, 0, 0],
  velocityKmPerS: [0, 7.5, 0],
  covarianceRtnM2: DIAGONAL(30, 400, 50),
};
const object2: EncounterObject = {
  positionKm: [7000.12, 0, 0],
  velocityKmPerS: [0, 0, 7.5],
  covarianceRtnM2: DIAGONAL(40, 300, 60),
};
const encounter: Encounter = { object1, object2, hardBodyRadiusM: 12 };

const along = (object: EncounterObject, seconds: number): EncounterObject => ({
  ...object,
  positionKm: object.positionKm.map((x, i) => x + seconds * object.velocityKmPerS[i]) as unknown as Vector3,
});

describe('the package entry', () => {
  it('exports the two functions and nothing else that runs', async () => {
    const entry = await import('../../src/index.js');
    expect(Object.keys(entry).sort()).toEqual(['assessEncounter', 'fosterProbability']);
  });
});

describe('assessEncounter', () => {
  it('gives the figures of an encounter worked by hand', () => {
    const found = assessEncounter(encounter);
    expect(found.missDistanceM).toBeCloseTo(120, 6);
    expect(found.relativeSpeedMPerS).toBeCloseTo(7500 * Math.SQRT2, 6);
    expect(found.relativePositionRtnM[0]).toBeCloseTo(120, 6);
    expect(found.relativePositionRtnM[1]).toBeCloseTo(0, 6);
    expect(found.relativeVelocityRtnMPerS[1]).toBeCloseTo(-7500, 6);
    expect(found.relativeVelocityRtnMPerS[2]).toBeCloseTo(7500, 6);
    // Radial: both radial sigmas. Across: the direction (y + z) / sqrt(2), perpendicular to the relative
    // velocity. y is transverse for object 1 and, with the sign turned, normal for object 2; z the reverse.
    const sigmaRadial = Math.hypot(30, 40);
    const sigmaAcross = Math.sqrt(0.5 * (400 ** 2 + 50 ** 2 + 300 ** 2 + 60 ** 2));
    const figure = fosterProbability({
      sigmaXM: sigmaRadial,
      sigmaYM: sigmaAcross,
      missXM: 120,
      missYM: 0,
      hardBodyRadiusM: 12,
    });
    expect((found.collisionProbability ?? 0) / figure).toBeCloseTo(1, 9);
    expect(found.mahalanobisDistance).toBeCloseTo(120 / sigmaRadial, 9);
    expect(found.collisionProbabilityMax).toBeGreaterThan(figure);
  });

  it('does not depend on how far from closest approach the states are, along the straight path', () => {
    const exact = assessEncounter(encounter);
    const late = assessEncounter({
      ...encounter,
      object1: along(object1, 0.001),
      object2: along(object2, 0.001),
    });
    expect(late.missDistanceM).toBeGreaterThan(exact.missDistanceM + 0.1);
    expect((late.collisionProbability ?? 0) / (exact.collisionProbability ?? 1)).toBeCloseTo(1, 5);
    expect(late.mahalanobisDistance).toBeCloseTo(exact.mahalanobisDistance ?? 0, 5);
  });

  it('gives the same probability with the objects exchanged', () => {
    const one = assessEncounter(encounter);
    const other = assessEncounter({ object1: object2, object2: object1, hardBodyRadiusM: 12 });
    expect((other.collisionProbability ?? 0) / (one.collisionProbability ?? 1)).toBeCloseTo(1, 10);
  });

  it('takes correlations into account', () => {
    const covarianceRtnM2: Matrix3 = [
      [900, -10_000, 0],
      [-10_000, 160_000, 300],
      [0, 300, 2500],
    ];
    const found = assessEncounter({ ...encounter, object1: { ...object1, covarianceRtnM2 } });
    expect(found.collisionProbability).not.toBeCloseTo(
      assessEncounter(encounter).collisionProbability ?? 0,
      6,
    );
  });

  it('gives 0 for a radius of 0', () => {
    expect(assessEncounter({ ...encounter, hardBodyRadiusM: 0 })).toMatchObject({
      collisionProbability: 0,
      collisionProbabilityMax: 0,
    });
  });

  it('has no probability, but the geometry, where the relative speed is 0', () => {
    const still = { ...object2, velocityKmPerS: object1.velocityKmPerS };
    const found = assessEncounter({ ...encounter, object2: still });
    expect(found).toMatchObject({
      relativeSpeedMPerS: 0,
      collisionProbability: undefined,
      collisionProbabilityMax: undefined,
      mahalanobisDistance: undefined,
    });
    expect(found.missDistanceM).toBeCloseTo(120, 6);
  });

  it.each([
    ['zero', DIAGONAL(0, 0, 0), DIAGONAL(0, 0, 0)],
    ['without radial extent', DIAGONAL(0, 400, 50), DIAGONAL(0, 300, 60)],
    ['with sigmas in a ratio above a million', DIAGONAL(1e-4, 400, 50), DIAGONAL(1e-4, 300, 60)],
  ])('has no probability where the covariance in the encounter plane is %s', (_, first, second) => {
    const found = assessEncounter({
      object1: { ...object1, covarianceRtnM2: first },
      object2: { ...object2, covarianceRtnM2: second },
      hardBodyRadiusM: 12,
    });
    expect(found.collisionProbability).toBeUndefined();
    expect(found.collisionProbabilityMax).toBeUndefined();
    expect(found.mahalanobisDistance).toBeUndefined();
  });

  it('has a probability where only the direction of the relative velocity lacks extent', () => {
    const covarianceRtnM2 = DIAGONAL(30, 0, 400);
    const head: EncounterObject = { ...object2, velocityKmPerS: [0, -7.5, 0.001], covarianceRtnM2 };
    const found = assessEncounter({ ...encounter, object1: { ...object1, covarianceRtnM2 }, object2: head });
    expect(found.collisionProbability).toBeGreaterThan(0);
  });

  const symmetric = DIAGONAL(1, 1, 1);
  const refused: [string, Partial<EncounterObject> | unknown, string][] = [
    [
      'two rows',
      {
        covarianceRtnM2: [
          [1, 0, 0],
          [0, 1, 0],
        ],
      },
      'object2.covarianceRtnM2 must have three rows of three numbers, got [[1, 0, 0], [0, 1, 0]]',
    ],
    [
      'NaN',
      {
        covarianceRtnM2: [
          [1, 0, 0],
          [0, Number.NaN, 0],
          [0, 0, 1],
        ],
      },
      'object2.covarianceRtnM2[1][1] must be a finite number, got NaN',
    ],
    [
      'asymmetric',
      {
        covarianceRtnM2: [
          [1, 0.5, 0],
          [0.4, 1, 0],
          [0, 0, 1],
        ],
      },
      'object2.covarianceRtnM2 must be symmetric, but [0][1] is 0.5 and [1][0] is 0.4',
    ],
    [
      'negative variance',
      {
        covarianceRtnM2: [
          [1, 0, 0],
          [0, 1, 0],
          [0, 0, -3],
        ],
      },
      'object2.covarianceRtnM2[2][2] is a variance and must not be negative, got -3',
    ],
    [
      'correlation above 1',
      {
        covarianceRtnM2: [
          [1, 1.1, 0],
          [1.1, 1, 0],
          [0, 0, 1],
        ],
      },
      'object2.covarianceRtnM2 must be positive semidefinite, got [[1, 1.1, 0], [1.1, 1, 0], [0, 0, 1]]',
    ],
    [
      'indefinite',
      {
        covarianceRtnM2: [
          [1, 0.9, 0.9],
          [0.9, 1, -0.9],
          [0.9, -0.9, 1],
        ],
      },
      'object2.covarianceRtnM2 must be positive semidefinite, got [[1, 0.9, 0.9], [0.9, 1, -0.9], [0.9, -0.9, 1]]',
    ],
    [
      'covariance beside a zero variance',
      {
        covarianceRtnM2: [
          [0, 0.1, 0],
          [0.1, 1, 0],
          [0, 0, 1],
        ],
      },
      'object2.covarianceRtnM2 must be positive semidefinite, got [[0, 0.1, 0], [0.1, 1, 0], [0, 0, 1]]',
    ],
    ['short position', { positionKm: [1, 2] }, 'object2.positionKm must be three numbers, got [1, 2]'],
    [
      'infinite velocity',
      { velocityKmPerS: [1, Number.POSITIVE_INFINITY, 0] },
      'object2.velocityKmPerS[1] must be a finite number, got Infinity',
    ],
    ['text', { velocityKmPerS: [1, '2', 0] }, 'object2.velocityKmPerS[1] must be a finite number, got "2"'],
    [
      'no plane',
      { velocityKmPerS: [1, 0, 0] },
      'object2 has no orbital plane, hence no RTN frame: positionKm [7000.12, 0, 0], velocityKmPerS [1, 0, 0]',
    ],
  ];
  it.each(refused)('refuses a second object with %s', (_, wrong, message) => {
    const object = { ...object2, covarianceRtnM2: symmetric, ...(wrong as Partial<EncounterObject>) };
    expect(() => assessEncounter({ ...encounter, object2: object })).toThrow(new RangeError(message));
  });

  it('refuses a missing object and a negative radius', () => {
    expect(() => assessEncounter({ ...encounter, object1: undefined as unknown as EncounterObject })).toThrow(
      new RangeError('object1 must be an object with a state and a covariance, got undefined'),
    );
    expect(() => assessEncounter({ ...encounter, hardBodyRadiusM: -0.5 })).toThrow(
      new RangeError('hardBodyRadiusM must not be negative, got -0.5'),
    );
  });
});
