/** Marsaglia's multiply-with-carry generator: the tests draw the same cases on every run. */
export function seeded(seed: number): () => number {
  let z = (seed ^ 0x9e3779b9) >>> 0 || 1;
  let w = (seed * 2654435761) >>> 0 || 2;
  const next = () => {
    z = (36969 * (z & 65535) + (z >>> 16)) >>> 0;
    w = (18000 * (w & 65535) + (w >>> 16)) >>> 0;
    return (((z << 16) + w) >>> 0) / 4294967296;
  };
  for (let i = 0; i < 10; i++) next();
  return next;
}

/** A factor drawn evenly on a logarithmic scale. */
export function logUniform(random: () => number, low: number, high: number): number {
  return low * (high / low) ** random();
}
