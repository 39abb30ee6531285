import type { Companions } from '../encounters/companions.js';
import type { CompanionPair } from '../tables/companions-csv.js';
import type { ScreenedObject } from './screened-object.js';

/** A row of `companions.csv`; distances in meters, speeds in m/s. */
export function companionRow(
  pair: Companions,
  objects: readonly ScreenedObject[],
  remarks: readonly string[] = [],
): CompanionPair {
  const side = (index: number) => ({ designator: objects[index].designator, name: objects[index].name });
  return {
    object1: side(pair.first),
    object2: side(pair.second),
    closestMs: pair.closestMs,
    closestDistanceM: 1000 * pair.closestKm,
    farthestDistanceM: 1000 * pair.farthestKm,
    fastestMPerS: 1000 * pair.fastestKmPerS,
    slowestMPerS: 1000 * pair.slowestKmPerS,
    remarks,
  };
}
