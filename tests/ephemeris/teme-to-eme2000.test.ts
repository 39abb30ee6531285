import { expect, test } from 'vitest';
import { temeToEme2000 } from '../../src/ephemeris/teme-to-eme2000.js';
import { cross, dot, norm, subtract } from '../../src/vector.js';

const STATE = {
  positionKm: [2570.097065, 2244.654904, 6281.497978],
  velocityKmPerS: [4.418769571, 4.833547743, -3.526774282],
} as const;
const TCA_MS = Date.UTC(2026, 11, 2, 3, 14, 15, 926);

test('is a rotation: lengths, the angle between and the sense of turn stay', () => {
  const turned = temeToEme2000(STATE, TCA_MS);
  expect(norm(turned.positionKm)).toBeCloseTo(norm(STATE.positionKm), 9);
  expect(norm(turned.velocityKmPerS)).toBeCloseTo(norm(STATE.velocityKmPerS), 12);
  expect(dot(turned.positionKm, turned.velocityKmPerS)).toBeCloseTo(
    dot(STATE.positionKm, STATE.velocityKmPerS),
    8,
  );
  const momentum = cross(STATE.positionKm, STATE.velocityKmPerS);
  const expected = temeToEme2000({ ...STATE, positionKm: momentum }, TCA_MS).positionKm;
  expect(norm(subtract(cross(turned.positionKm, turned.velocityKmPerS), expected))).toBeLessThan(1e-6);
});

test('one second of the time scale is less than a millimeter', () => {
  const turned = temeToEme2000(STATE, TCA_MS).positionKm;
  const later = temeToEme2000(STATE, TCA_MS + 1000).positionKm;
  expect(norm(subtract(later, turned)) * 1e6).toBeLessThan(1);
  expect(norm(subtract(later, turned))).toBeGreaterThan(0);
});

test('refuses what is no time', () => {
  expect(() => temeToEme2000(STATE, Number.NaN)).toThrow(RangeError);
});
