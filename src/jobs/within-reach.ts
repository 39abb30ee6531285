import { primaryBand, radiusBand, sieve } from '../encounters/sieve.js';
import type { ScreenedObject } from './screened-object.js';

/**
 * Objects whose height bands come near that of any primary in the window.
 *
 * @param missKm largest distance that counts as near
 * @param startMs milliseconds of UTC since 1970-01-01, as `endMs`
 */
export function withinReach(
  others: readonly ScreenedObject[],
  primaries: readonly ScreenedObject[],
  missKm: number,
  startMs: number,
  endMs: number,
): ScreenedObject[] {
  if (others.length === 0) return [];
  const bandsOf = (objects: readonly ScreenedObject[], bandOf: typeof primaryBand) =>
    objects.map(({ records, place, set, validFromMs, validToMs }) =>
      bandOf({ records, place }, set.epochMs, Math.max(startMs, validFromMs), Math.min(endMs, validToMs)),
    );
  const passes = sieve(bandsOf(others, radiusBand), bandsOf(primaries, primaryBand), missKm);
  return others.filter((_, i) => passes[i] === 1);
}
