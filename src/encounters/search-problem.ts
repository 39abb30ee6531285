import type { SatRec } from 'satellite.js';
import { EARTH_RADIUS_KM, orbitOf } from '../elements/orbit.js';
import { type MeanElements, sgp4RecordOf } from '../elements/sgp4-record.js';
import { SLAB_S } from '../ephemeris/node-spacing.js';
import { laySecularTerms, TERMS_SIZE } from '../ephemeris/secular-elements.js';

/**
 * What is screened against what. The first `primaryCount` objects are the primaries (the fleet, a launch
 * batch, or everything); the others are only met by primaries, never by each other.
 */
export type SearchObjects = {
  readonly count: number;
  readonly primaryCount: number;
  /** SGP4's record, which may be made when it is first asked for. */
  readonly recordOf: (object: number) => SatRec;
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

/** Mean elements with the time in which they stand for their object. */
export type SearchedSet = MeanElements & { readonly validFromMs?: number; readonly validToMs?: number };

/**
 * Readies element sets for a search, SGP4 records included.
 *
 * @param sets primaries first, all of them accepted by SGP4
 * @param records their SGP4 records, where they are there already
 */
export function searchObjectsOf(
  sets: readonly SearchedSet[],
  primaryCount: number,
  records: readonly SatRec[] = sets.map(sgp4RecordOf),
): SearchObjects {
  const orbits = sets.map((set, i) => orbitOf(set, records[i]));
  const secularTerms = new Float64Array(TERMS_SIZE * sets.length);
  for (const [i, record] of records.entries()) laySecularTerms(record, secularTerms, TERMS_SIZE * i);
  return {
    count: sets.length,
    primaryCount,
    recordOf: (object) => records[object],
    secularTerms,
    epochMs: Float64Array.from(sets, (set) => set.epochMs),
    eccentricity: Float64Array.from(sets, (set) => set.eccentricity),
    perigeeRadiusKm: Float64Array.from(orbits, (orbit) => orbit.perigeeHeightKm + EARTH_RADIUS_KM),
    validFromMs: Float64Array.from(sets, (set) => set.validFromMs ?? Number.NEGATIVE_INFINITY),
    validToMs: Float64Array.from(sets, (set) => set.validToMs ?? Number.POSITIVE_INFINITY),
  };
}
