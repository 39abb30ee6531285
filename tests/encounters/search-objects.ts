import { orbitOf } from '../../src/elements/orbit.js';
import type { MeanElements } from '../../src/elements/sgp4-record.js';
import type { SearchObjects } from '../../src/encounters/search-problem.js';
import { sgp4RecordsOf } from '../../src/ephemeris/sgp4-records.js';
import { searchObjectsOf as ofObjects } from '../../src/jobs/search-plan.js';

/** Mean elements with the time in which they stand for their object. */
export type SearchedSet = MeanElements & { readonly validFromMs?: number; readonly validToMs?: number };

/**
 * Readies element sets for a search. `loadSgp4` must have been awaited.
 *
 * @param sets primaries first, all of them accepted by SGP4
 */
export function searchObjectsOf(sets: readonly SearchedSet[], primaryCount: number): SearchObjects {
  const records = sgp4RecordsOf(sets);
  const objects = sets.map((set, place) => ({
    set,
    records,
    place,
    orbit: orbitOf(set),
    validFromMs: set.validFromMs ?? Number.NEGATIVE_INFINITY,
    validToMs: set.validToMs ?? Number.POSITIVE_INFINITY,
  }));
  return ofObjects(objects, primaryCount, sets[0]?.epochMs ?? 0);
}
