import { EARTH_RADIUS_KM, orbitOf } from '../../src/elements/orbit.js';
import type { MeanElements } from '../../src/elements/sgp4-record.js';
import type { SearchObjects } from '../../src/encounters/search-problem.js';
import { laySecularTerms, TERMS_SIZE } from '../../src/ephemeris/secular-elements.js';
import { sgp4RecordsOf } from '../../src/jobs/screened-object.js';

/** Mean elements with the time in which they stand for their object. */
export type SearchedSet = MeanElements & { readonly validFromMs?: number; readonly validToMs?: number };

/**
 * Readies element sets for a search. `loadSgp4` must have been awaited.
 *
 * @param sets primaries first, all of them accepted by SGP4
 */
export function searchObjectsOf(sets: readonly SearchedSet[], primaryCount: number): SearchObjects {
  const records = sgp4RecordsOf(sets);
  const orbits = sets.map((set) => orbitOf(set));
  const secularTerms = new Float64Array(TERMS_SIZE * sets.length);
  for (let i = 0; i < sets.length; i++) laySecularTerms(records, i, secularTerms, TERMS_SIZE * i);
  return {
    count: sets.length,
    primaryCount,
    records,
    secularTerms,
    epochMs: Float64Array.from(sets, (set) => set.epochMs),
    eccentricity: Float64Array.from(sets, (set) => set.eccentricity),
    perigeeRadiusKm: Float64Array.from(orbits, (orbit) => orbit.perigeeHeightKm + EARTH_RADIUS_KM),
    validFromMs: Float64Array.from(sets, (set) => set.validFromMs ?? Number.NEGATIVE_INFINITY),
    validToMs: Float64Array.from(sets, (set) => set.validToMs ?? Number.POSITIVE_INFINITY),
  };
}
