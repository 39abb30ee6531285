import { SLAB_S } from '../ephemeris/node-spacing.js';
import type { Sgp4Records } from '../ephemeris/sgp4-records.js';

/**
 * What is screened against what. The first `primaryCount` objects are the primaries (the fleet, a launch
 * batch, or everything); the others are only met by primaries, never by each other.
 */
export type SearchObjects = {
  readonly count: number;
  readonly primaryCount: number;
  /** Their SGP4 records, in the same order. */
  readonly records: Sgp4Records;
  /** `TERMS_SIZE` numbers an object, as `laySecularTerms` lays them. */
  readonly secularTerms: Float64Array;
  readonly epochMs: Float64Array;
  /** Mean eccentricity at epoch. */
  readonly eccentricity: Float64Array;
  /** Mean perigee distance from the Earth's center at epoch. */
  readonly perigeeRadiusKm: Float64Array;
  /** An object exists from here (inclusive) to there (exclusive); infinite where nothing limits it. */
  readonly validFromMs: Float64Array;
  readonly validToMs: Float64Array;
};

export type SearchRules = {
  /** The window is [startMs, endMs); a closest approach belongs to the window that holds its TCA. */
  readonly startMs: number;
  readonly endMs: number;
  /** Largest distance of a closest approach, km: the radius of the sphere around the screening volume. */
  readonly missKm: number;
  /** Whether primaries meet each other. */
  readonly withinPrimaries: boolean;
  /** Pairs that are not searched, as `pairKey`. */
  readonly skippedPairs: ReadonlySet<number>;
  /** In place of the step of the grid that costs least: the result is the same for any, which tests hold it to. */
  readonly stepS?: number;
  /** Whether pairs may be looked at one by one, by the same right: default where the primaries are few. */
  readonly byPairs?: boolean;
};

/** Number of slabs of a window. */
export function slabCount({ startMs, endMs }: Pick<SearchRules, 'startMs' | 'endMs'>): number {
  return Math.ceil((endMs - startMs) / (SLAB_S * 1000));
}

/** Where a slab of the window starts and how long it is: the last one may be short. */
export function slabOf(
  { startMs, endMs }: Pick<SearchRules, 'startMs' | 'endMs'>,
  slabIndex: number,
): { startMs: number; lengthS: number } {
  const slabStartMs = startMs + slabIndex * SLAB_S * 1000;
  return { startMs: slabStartMs, lengthS: Math.min(SLAB_S, (endMs - slabStartMs) / 1000) };
}

/** One number for an unordered pair of object indices. */
export function pairKey(a: number, b: number, count: number): number {
  return a < b ? a * count + b : b * count + a;
}
