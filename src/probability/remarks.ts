/**
 * What makes the figures of a row less trustworthy: the codes, in the order in which a row lists them, and
 * what README and help say about each.
 */
export const REMARKS = {
  'no-relative-motion': 'The relative speed is 0, so there is no encounter plane and no probability.',
  'singular-covariance':
    'The combined covariance has no extent in one direction of the encounter plane, so there is no probability.',
  'not-straight':
    'The relative path bends, or the covariance turns, too much during the passage for the two-dimensional probability.',
  'miss-within-radius':
    'The predicted miss is within the combined hard-body radius; the maximum probability is then the limit for vanishing sigmas.',
  diluted:
    'Smaller sigmas would raise the probability: a low figure tells of poor orbits, not of a safe distance.',
  'old-elements': 'The elements of at least one object are older at closest approach than the age limit.',
  'epoch-after-tca': 'The elements of at least one object have their epoch after closest approach.',
  'sigma-default': 'The sigmas of at least one object are the built-in ones, not from the table given.',
  'sigma-extrapolated':
    'The elements of at least one object are older than the last age of its sigmas, whose growth is carried on.',
  'radius-default': 'The hard-body radius of at least one object is the built-in one.',
} as const satisfies Readonly<Record<string, string>>;

export type RemarkCode = keyof typeof REMARKS;

/** What the remarks of a row depend on; pairs are object 1 and object 2. */
export type RemarkGrounds = {
  readonly relativeSpeedMPerS: number;
  readonly missDistanceM: number;
  readonly hardBodyRadiusM: number;
  /** Whether the covariance has a density in the encounter plane. */
  readonly hasProbability: boolean;
  /** `undefined` where it was not tested. */
  readonly isStraight: boolean | undefined;
  /** `undefined` where there is no probability. */
  readonly peakSigmaScale: number | undefined;
  readonly elementAgeDays: readonly [number, number];
  readonly maxAgeDays: number;
  readonly hasDefaultSigma: readonly [boolean, boolean];
  readonly isBeyondSigmaTable: readonly [boolean, boolean];
  readonly hasDefaultRadius: readonly [boolean, boolean];
};

/** The remarks of a row as one number: a bit for each, the first of `REMARKS` the lowest. */
export function remarkBitsOf(grounds: RemarkGrounds): number {
  const still = grounds.relativeSpeedMPerS === 0;
  const [age1, age2] = grounds.elementAgeDays;
  const { maxAgeDays, hasDefaultSigma, isBeyondSigmaTable, hasDefaultRadius } = grounds;
  return (
    (still ? BITS['no-relative-motion'] : 0) |
    (!still && !grounds.hasProbability ? BITS['singular-covariance'] : 0) |
    (grounds.isStraight === false ? BITS['not-straight'] : 0) |
    (grounds.missDistanceM < grounds.hardBodyRadiusM ? BITS['miss-within-radius'] : 0) |
    (grounds.peakSigmaScale !== undefined && grounds.peakSigmaScale < 1 ? BITS.diluted : 0) |
    (Math.abs(age1) > maxAgeDays || Math.abs(age2) > maxAgeDays ? BITS['old-elements'] : 0) |
    (age1 < 0 || age2 < 0 ? BITS['epoch-after-tca'] : 0) |
    (hasDefaultSigma[0] || hasDefaultSigma[1] ? BITS['sigma-default'] : 0) |
    (isBeyondSigmaTable[0] || isBeyondSigmaTable[1] ? BITS['sigma-extrapolated'] : 0) |
    (hasDefaultRadius[0] || hasDefaultRadius[1] ? BITS['radius-default'] : 0)
  );
}

const BITS = Object.fromEntries(Object.keys(REMARKS).map((code, i) => [code, 1 << i])) as Readonly<
  Record<RemarkCode, number>
>;
