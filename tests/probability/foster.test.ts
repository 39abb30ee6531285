import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { fosterProbability } from '../../src/probability/foster.js';
import { logUniform, seeded } from './seeded.js';

type Case = readonly [sigmaX: number, sigmaY: number, missX: number, missY: number, radius: number];

function foster([sigmaXM, sigmaYM, missXM, missYM, hardBodyRadiusM]: Case): number {
  return fosterProbability({ sigmaXM, sigmaYM, missXM, missYM, hardBodyRadiusM });
}

function expectClose(found: number, reference: number, relative: number, which: Case): void {
  if (!(Math.abs(found - reference) <= relative * reference)) {
    expect.fail(`${which.join(', ')}: found ${found}, expected ${reference}`);
  }
}

/** Gauss-Legendre nodes and weights on -1 to 1, by Newton's method on the Legendre polynomial. */
function legendre(count: number): { nodes: number[]; weights: number[] } {
  const nodes: number[] = [];
  const weights: number[] = [];
  for (let i = 0; i < count; i++) {
    let x = Math.cos((Math.PI * (i + 0.75)) / (count + 0.5));
    let slope = 0;
    for (let k = 0; k < 20; k++) {
      let p = 1;
      let before = 0;
      for (let n = 1; n <= count; n++) [p, before] = [((2 * n - 1) * x * p - (n - 1) * before) / n, p];
      slope = (count * (x * p - before)) / (x * x - 1);
      x -= p / slope;
    }
    nodes.push(x);
    weights.push(2 / ((1 - x * x) * slope * slope));
  }
  return { nodes, weights };
}

const RADIAL = legendre(40);

/** The density summed over the disc in polar coordinates about its center; for discs of a few sigmas. */
function overDisc([sigmaX, sigmaY, missX, missY, radius]: Case): number {
  const angles = 160;
  let sum = 0;
  for (let i = 0; i < 40; i++) {
    const r = 0.5 * radius * (1 + RADIAL.nodes[i]);
    let ring = 0;
    for (let j = 0; j < angles; j++) {
      const phi = (2 * Math.PI * j) / angles;
      const x = (missX + r * Math.cos(phi)) / sigmaX;
      const y = (missY + r * Math.sin(phi)) / sigmaY;
      ring += Math.exp(-0.5 * (x * x + y * y));
    }
    sum += RADIAL.weights[i] * r * ring;
  }
  return (sum * 0.5 * radius) / (angles * sigmaX * sigmaY);
}

/**
 * The probability by the contour of the disc seen from the center of the density, sigmas scaled to 1:
 * 1/(2 pi) times the sum over the contour of (1 - exp(-r^2 / 2)) d(angle).
 */
function alongContour([sigmaX, sigmaY, missX, missY, radius]: Case): number {
  const steps = 20_000;
  let sum = 0;
  for (let j = 0; j < steps; j++) {
    const phi = (2 * Math.PI * (j + 0.5)) / steps;
    const x = (missX + radius * Math.cos(phi)) / sigmaX;
    const y = (missY + radius * Math.sin(phi)) / sigmaY;
    const dx = (-radius * Math.sin(phi)) / sigmaX;
    const dy = (radius * Math.cos(phi)) / sigmaY;
    const square = x * x + y * y;
    sum += (-Math.expm1(-0.5 * square) * (x * dy - y * dx)) / square;
  }
  return sum / steps;
}

describe('fosterProbability', () => {
  it('agrees with figures worked out with mpmath for any aspect ratio, size and magnitude', () => {
    // mpmath 1.3, 40 digits, tanh-sinh quadrature over the angle; drawn at random, aspect ratios to 1e6,
    // radii from 1e-4 to 1e4 times the smaller sigma, probabilities down to 1e-300.
    const [, ...lines] = readFileSync(new URL('foster-reference.csv', import.meta.url), 'utf8')
      .trim()
      .split('\n');
    expect(lines.length).toBeGreaterThan(150);
    for (const line of lines) {
      const [sigmaX, sigmaY, missX, missY, radius, reference] = line.split(',').map(Number);
      const which: Case = [sigmaX, sigmaY, missX, missY, radius];
      expectClose(foster(which), reference, 1e-10, which);
    }
  });

  it('agrees with a sum over the disc in polar coordinates, 4000 random cases', () => {
    const random = seeded(1);
    let smallest = 1;
    for (let i = 0; i < 4000; i++) {
      const sigmaX = logUniform(random, 1, 1e4);
      const sigmaY = random() < 0.2 ? sigmaX : sigmaX * logUniform(random, 1e-3, 1e3);
      const radius = Math.min(sigmaX, sigmaY) * logUniform(random, 1e-4, 1);
      const which: Case = [sigmaX, sigmaY, sigmaX * 9 * random(), -sigmaY * 9 * random(), radius];
      const reference = overDisc(which);
      smallest = Math.min(smallest, reference);
      expectClose(foster(which), reference, 1e-11, which);
    }
    expect(smallest).toBeLessThan(1e-30);
  });

  it('agrees with the contour integral where the disc spans many sigmas, 300 random cases', () => {
    const random = seeded(2);
    for (let i = 0; i < 300; i++) {
      const sigmaX = logUniform(random, 1, 10);
      const sigmaY = sigmaX * logUniform(random, 0.2, 5);
      const radius = Math.max(sigmaX, sigmaY) * logUniform(random, 1, 300);
      const distance = radius + (random() - 0.7) * 6 * sigmaX;
      const angle = 2 * Math.PI * random();
      const which: Case = [sigmaX, sigmaY, distance * Math.cos(angle), distance * Math.sin(angle), radius];
      const reference = alongContour(which);
      if (reference > 1e-4) expectClose(foster(which), reference, 1e-9, which);
    }
  });

  it('is the closed form for a disc about the center with equal sigmas', () => {
    for (const ratio of [1e-8, 1e-3, 0.1, 1, 3, 8, 50]) {
      expectClose(foster([7, 7, 0, 0, 7 * ratio]), -Math.expm1(-0.5 * ratio * ratio), 1e-13, [
        7,
        7,
        0,
        0,
        ratio,
      ]);
    }
  });

  it('does not depend on the order of the axes or on signs', () => {
    const figure = foster([300, 40, 200, 90, 12]);
    expect(foster([40, 300, 90, 200, 12])).toBe(figure);
    expect(foster([300, 40, -200, -90, 12])).toBe(figure);
  });

  it('runs out gracefully: denormal below 1e-308, then 0', () => {
    const far = foster([1000, 1000, 37_000, 0, 10]);
    expect(far).toBeGreaterThan(0);
    expect(far).toBeLessThan(1e-300);
    expect(foster([1000, 1000, 50_000, 0, 10])).toBe(0);
    expect(foster([1, 1, 0, 0, 0])).toBe(0);
    expect(foster([1, 1, 3, 3, 1e6])).toBe(1);
  });

  it('stays a probability for absurd magnitudes', () => {
    const sizes = [1e-300, 1e-9, 1, 1e8, 1e150, 1e300];
    for (const sigmaX of sizes)
      for (const sigmaY of sizes)
        for (const missX of [0, ...sizes])
          for (const missY of [0, ...sizes])
            for (const radius of [0, ...sizes]) {
              const found = foster([sigmaX, sigmaY, missX, missY, radius]);
              if (!(found >= 0 && found <= 1))
                expect.fail(`${[sigmaX, sigmaY, missX, missY, radius]}: ${found}`);
            }
  });

  it.each([
    [{ sigmaXM: 0 }, 'sigmaXM must be greater than 0, got 0'],
    [{ sigmaYM: -2 }, 'sigmaYM must be greater than 0, got -2'],
    [{ sigmaYM: Number.NaN }, 'sigmaYM must be a finite number, got NaN'],
    [{ missXM: Number.POSITIVE_INFINITY }, 'missXM must be a finite number, got Infinity'],
    [{ missYM: Number.NaN }, 'missYM must be a finite number, got NaN'],
    [{ hardBodyRadiusM: -1 }, 'hardBodyRadiusM must not be negative, got -1'],
  ])('refuses %o', (wrong, message) => {
    const good = { sigmaXM: 1, sigmaYM: 1, missXM: 0, missYM: 0, hardBodyRadiusM: 1 };
    expect(() => fosterProbability({ ...good, ...wrong })).toThrow(new RangeError(message));
  });

  it('refuses text in place of a number', () => {
    const wrong = { sigmaXM: '1', sigmaYM: 1, missXM: 0, missYM: 0, hardBodyRadiusM: 1 } as unknown;
    expect(() => fosterProbability(wrong as Parameters<typeof fosterProbability>[0])).toThrow(
      new RangeError('sigmaXM must be a finite number, got "1"'),
    );
  });
});
