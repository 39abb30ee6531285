import { compareDesignators } from '../tables/compare-designators.js';
import { type EncounterRecords, FIELD, FIELDS } from './encounter-records.js';

/**
 * The order of all tables: collision probability from high to low, then miss distance, time of closest
 * approach, designator of object 1 and of object 2 from low to high.
 *
 * An encounter without a probability comes after all that have one, closest first: any probability put
 * in its place would be made up. The terminal table shows those apart, so that none hides at the end.
 *
 * @returns record numbers from the first rank to the last
 */
export function rankRecords(
  records: EncounterRecords,
  objects: readonly { readonly designator: string }[],
): Uint32Array {
  const { data, size } = records;
  const order = Uint32Array.from({ length: size }, (_, i) => i);
  const probability = Float64Array.from(order, (i) => {
    const value = data[FIELDS * i + FIELD.probability];
    return Number.isNaN(value) ? -1 : value;
  });
  return order.sort((a, b) => {
    const i = FIELDS * a;
    const j = FIELDS * b;
    return (
      probability[b] - probability[a] ||
      data[i + FIELD.missKm] - data[j + FIELD.missKm] ||
      data[i + FIELD.tcaMs] - data[j + FIELD.tcaMs] ||
      compareDesignators(
        objects[data[i + FIELD.first]].designator,
        objects[data[j + FIELD.first]].designator,
      ) ||
      compareDesignators(
        objects[data[i + FIELD.second]].designator,
        objects[data[j + FIELD.second]].designator,
      )
    );
  });
}
