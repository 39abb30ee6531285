import { describe, expect, it } from 'vitest';
import { assessEncounter } from '../../src/index.js';

// The states and position covariances of the worked example in CCSDS 508.0-B-1, Conjunction Data Message,
// 3.6.2. The relative figures below are the ones printed there in 3.6.3, except where named; the printed
// transverse and normal components (-70.2 and 711.8 m) do not follow from the printed states.
const object1 = {
  positionKm: [2570.097065, 2244.654904, 6281.497978],
  velocityKmPerS: [4.418769571, 4.833547743, -3.526774282],
  covarianceRtnM2: [
    [4.142e1, -8.579, -2.313e1],
    [-8.579, 2.533e3, 1.336e1],
    [-2.313e1, 1.336e1, 7.098e1],
  ],
} as const;
const object2 = {
  positionKm: [2569.5408, 2245.093614, 6281.599946],
  velocityKmPerS: [-2.8886125, -6.007247516, 3.328770172],
  covarianceRtnM2: [
    [1.337e3, -4.806e4, -3.298e1],
    [-4.806e4, 2.492e6, -7.5888e2],
    [-3.298e1, -7.5888e2, 7.105e1],
  ],
} as const;

describe('the worked example of CCSDS 508.0-B-1', () => {
  const found = assessEncounter({ object1, object2, hardBodyRadiusM: 10 });

  it('has the printed miss distance and relative speed', () => {
    expect(Math.trunc(found.missDistanceM)).toBe(715);
    expect(found.missDistanceM).toBeCloseTo(715.748, 3);
    expect(Math.trunc(found.relativeSpeedMPerS)).toBe(14762);
    expect(found.relativeSpeedMPerS).toBeCloseTo(14762.085, 3);
  });

  it('has the printed radial components', () => {
    expect(found.relativePositionRtnM[0].toFixed(1)).toBe('27.4');
    expect(found.relativeVelocityRtnMPerS[0].toFixed(1)).toBe('-7.2');
  });

  it('has the transverse and normal components that the printed states give', () => {
    // Worked out from the printed states with general-purpose libraries, not printed in the standard.
    expect(found.relativePositionRtnM[0]).toBeCloseTo(27.364, 3);
    expect(found.relativePositionRtnM[1]).toBeCloseTo(-93.746, 3);
    expect(found.relativePositionRtnM[2]).toBeCloseTo(709.054, 3);
    expect(found.relativeVelocityRtnMPerS[0]).toBeCloseTo(-7.195, 3);
  });

  it('has the probability that general-purpose libraries give for a radius of 10 m', () => {
    // NumPy for the geometry, scipy.integrate.dblquad over the disc in polar coordinates. The probability
    // printed in the standard comes without a radius and can't be checked.
    expect((found.collisionProbability ?? 0) / 5.675935038588e-8).toBeCloseTo(1, 9);
    expect(found.mahalanobisDistance).toBeCloseTo(5.008715078778, 9);
  });
});
