import { EARTH_RADIUS_KM, orbitOf } from '../../src/elements/orbit.js';
import { type MeanElements, sgp4RecordOf } from '../../src/elements/sgp4-record.js';
import type { SearchObjects } from '../../src/encounters/search-problem.js';
import { laySecularTerms, TERMS_SIZE } from '../../src/ephemeris/secular-elements.js';
import { sgp4RecordsOf } from '../synthetic/sgp4-records.js';

/** Mean elements with the time in which they stand for their object. */
export type SearchedSet = MeanElements & { readonly validFromMs?: number; readonly validToMs?: number };

/**
 * Readies element sets for a search. `loadSgp4` must have been awaited.
 *
 * @param sets primaries first, all of them accepted by SGP4
 */
export function searchObjectsOf(sets: readonly SearchedSet[], primaryCount: number): SearchObjects {
  const records = sets.map(sgp4RecordOf);
  const orbits = sets.map((set, i) => orbitOf(set, records[i]));
  const secularTerms = new Float64Array(TERMS_SIZE * sets.length);
  for (const [i, record] of records.entries()) laySecularTerms(record, secularTerms, TERMS_SIZE * i);
  return {
    count: sets.length,
    primaryCount,
    records: sgp4RecordsOf(sets),
    recordOf: (object) => records[object],
    secularTerms,
    epochMs: Float64Array.from(sets, (set) => set.epochMs),
    eccentricity: Float64Array.from(sets, (set) => set.eccentricity),
    perigeeRadiusKm: Float64Array.from(orbits, (orbit) => orbit.perigeeHeightKm + EARTH_RADIUS_KM),
    validFromMs: Float64Array.from(sets, (set) => set.validFromMs ?? Number.NEGATIVE_INFINITY),
    validToMs: Float64Array.from(sets, (set) => set.validToMs ?? Number.POSITIVE_INFINITY),
  };
}
