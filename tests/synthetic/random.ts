/** A stream of pseudo-random draws; the same seed gives the same stream on every machine. */
export type Random = {
  /** 32 bits, 0 to 2^32 - 1. */
  readonly bits: () => number;
  /** Uniform in [0, 1), 32 bits fine. */
  readonly uniform: () => number;
  /** Uniform in [low, high). */
  readonly between: (low: number, high: number) => number;
  readonly normal: (mean: number, sigma: number) => number;
  /** Uniform whole number in 0 to `below` - 1. */
  readonly integer: (below: number) => number;
  readonly choice: <T>(items: readonly T[]) => T;
  /** One of `items`, each as likely as its weight says; weights need not add up to 1. */
  readonly weighted: <T extends { readonly weight: number }>(items: readonly T[]) => T;
};

/**
 * xoshiro128** 1.1 (Blackman and Vigna, "Scrambled Linear Pseudorandom Number Generators", ACM TOMS
 * 47(4), 2021), its state filled by SplitMix64 as its authors recommend.
 *
 * @param seed a whole number from 0 to 2^53 - 1
 */
export function seededRandom(seed: number): Random {
  if (!Number.isSafeInteger(seed) || seed < 0)
    throw new RangeError(`seed ${seed} is not a whole number >= 0`);
  const split = splitMix64(BigInt(seed));
  const low = split();
  const high = split();
  return randomFrom(
    xoshiro128StarStar([
      Number(low & 0xffffffffn),
      Number(low >> 32n),
      Number(high & 0xffffffffn),
      Number(high >> 32n),
    ]),
  );
}

/** SplitMix64 (Steele, Lea, Flood, "Fast splittable pseudorandom number generators", OOPSLA 2014). */
export function splitMix64(seed: bigint): () => bigint {
  let state = seed;
  return () => {
    state = BigInt.asUintN(64, state + 0x9e3779b97f4a7c15n);
    let z = state;
    z = BigInt.asUintN(64, (z ^ (z >> 30n)) * 0xbf58476d1ce4e5b9n);
    z = BigInt.asUintN(64, (z ^ (z >> 27n)) * 0x94d049bb133111ebn);
    return z ^ (z >> 31n);
  };
}

/** The bare generator, 32 bits a call; `state` must not be all zero. */
export function xoshiro128StarStar(state: readonly [number, number, number, number]): () => number {
  let [a, b, c, d] = state;
  return () => {
    const result = Math.imul(rotateLeft(Math.imul(b, 5), 7), 9) >>> 0;
    const shifted = b << 9;
    c ^= a;
    d ^= b;
    b ^= c;
    a ^= d;
    c ^= shifted;
    d = rotateLeft(d, 11);
    return result;
  };
}

function randomFrom(bits: () => number): Random {
  const uniform = () => bits() / 4_294_967_296;
  const integer = (below: number) => Math.floor(uniform() * below);
  let spare: number | undefined;
  // Marsaglia's polar method: two normal draws at a time.
  const standardNormal = () => {
    if (spare !== undefined) {
      const kept = spare;
      spare = undefined;
      return kept;
    }
    for (;;) {
      const x = 2 * uniform() - 1;
      const y = 2 * uniform() - 1;
      const square = x * x + y * y;
      if (square === 0 || square >= 1) continue;
      const factor = Math.sqrt((-2 * Math.log(square)) / square);
      spare = y * factor;
      return x * factor;
    }
  };
  return {
    bits,
    uniform,
    integer,
    between: (low, high) => low + (high - low) * uniform(),
    normal: (mean, sigma) => mean + sigma * standardNormal(),
    choice: (items) => items[integer(items.length)],
    weighted: (items) => {
      let rest = uniform() * items.reduce((sum, item) => sum + item.weight, 0);
      for (const item of items) {
        rest -= item.weight;
        if (rest < 0) return item;
      }
      return items[items.length - 1];
    },
  };
}

function rotateLeft(x: number, count: number): number {
  return (x << count) | (x >>> (32 - count));
}
