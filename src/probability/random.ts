/**
 * Evenly distributed numbers from 0 up to 1 with 53 random bits: the same seed, the same numbers.
 *
 * @param seed any integer; spread over the state of the generator by the mixing of MurmurHash3
 */
export function uniformGenerator(seed: number): () => number {
  let mixed = seed | 0;
  const mix = () => {
    mixed = (mixed + 0x9e3779b9) | 0;
    let z = mixed;
    z = Math.imul(z ^ (z >>> 16), 0x85ebca6b);
    z = Math.imul(z ^ (z >>> 13), 0xc2b2ae35);
    return z ^ (z >>> 16);
  };
  const next = xoshiro128StarStar(mix(), mix(), mix(), mix());
  return () => ((next() >>> 5) * 67_108_864 + (next() >>> 6)) / 9_007_199_254_740_992;
}

/**
 * Integers from 0 to 2^32 - 1 from a state of four 32-bit integers, not all 0.
 *
 * Source: D. Blackman and S. Vigna, "Scrambled Linear Pseudorandom Number Generators", ACM Transactions on
 * Mathematical Software 47 (2021), xoshiro128**.
 */
export function xoshiro128StarStar(s0: number, s1: number, s2: number, s3: number): () => number {
  let a = s0 | 0;
  let b = s1 | 0;
  let c = s2 | 0;
  let d = s3 | 0;
  return () => {
    const product = Math.imul(b, 5);
    const result = Math.imul((product << 7) | (product >>> 25), 9) >>> 0;
    const shifted = b << 9;
    c ^= a;
    d ^= b;
    b ^= c;
    a ^= d;
    c ^= shifted;
    d = (d << 11) | (d >>> 21);
    return result;
  };
}

/**
 * Standard normal numbers by the polar method (G. Marsaglia and T. A. Bray, "A Convenient Method for
 * Generating Normal Variables", SIAM Review 6, 1964).
 *
 * @param uniform numbers from 0 up to 1
 */
export function normalGenerator(uniform: () => number): () => number {
  let spare: number | undefined;
  return () => {
    if (spare !== undefined) {
      const kept = spare;
      spare = undefined;
      return kept;
    }
    for (;;) {
      const x = 2 * uniform() - 1;
      const y = 2 * uniform() - 1;
      const square = x * x + y * y;
      if (square >= 1 || square === 0) continue;
      const factor = Math.sqrt((-2 * Math.log(square)) / square);
      spare = y * factor;
      return x * factor;
    }
  };
}
