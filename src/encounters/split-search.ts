import { TERMS_SIZE } from '../ephemeris/secular-elements.js';
import { pickRecords } from '../ephemeris/sgp4-records.js';
import { hasMeanOrbit } from './pair-search.js';
import { pairKey, type SearchObjects, type SearchRules } from './search-problem.js';
import { nearEarthBand, primaryBand, sieve } from './sieve.js';

/**
 * More primaries than this are stepped on a grid with all others: looking at pairs one by one costs more then.
 */
const MOST_PRIMARIES_BY_PAIRS = 250;

/** A search of some of the objects, which are numbered anew. */
export type PartSearch = {
  readonly objects: SearchObjects;
  readonly rules: SearchRules;
  /** Index in the whole search of each object. */
  readonly indices: Int32Array;
};

/** How a search is split: together the parts hold each pair once. */
export type SplitSearch = {
  /** Objects whose pairs are searched one by one: 1 for those that take part. */
  readonly byPairs: Uint8Array | undefined;
  readonly onGrids: readonly PartSearch[];
};

/**
 * Few primaries are searched by pairs with every object that a mean orbit stands for; what is left goes on
 * grids: all primaries with the other objects, and the primaries without a mean orbit with those that
 * have one.
 */
export function splitSearch(objects: SearchObjects, rules: SearchRules): SplitSearch {
  const { count, primaryCount } = objects;
  const isFew = primaryCount <= MOST_PRIMARIES_BY_PAIRS && rules.stepS === undefined;
  const all = Int32Array.from({ length: count }, (_, i) => i);
  if (!(rules.byPairs ?? isFew)) return { byPairs: undefined, onGrids: [{ objects, rules, indices: all }] };
  const byPairs = hasMeanOrbit(objects, rules);
  const primaries = all.subarray(0, primaryCount);
  const others = all.subarray(primaryCount);
  const hasOrbit = (object: number) => byPairs[object] === 1;
  const hasNone = (object: number) => byPairs[object] === 0;
  const stepped = primaries.filter(hasNone);
  const partners = (rules.withinPrimaries ? all : others).filter(hasOrbit);
  return {
    byPairs,
    onGrids: [
      partOf(objects, { ...rules, withinPrimaries: false }, primaries, others.filter(hasNone)),
      partOf(objects, rules, stepped, withinReach(objects, rules, stepped, partners)),
    ].flatMap((part) => (part === undefined ? [] : [part])),
  };
}

/** Those of the others, all with mean orbits, whose heights over the window come near those of any primary. */
function withinReach(
  { records, secularTerms, epochMs, validFromMs, validToMs }: SearchObjects,
  { startMs, endMs, missKm }: SearchRules,
  primaries: Int32Array,
  others: Int32Array,
): Int32Array {
  if (primaries.length === 0) return others.subarray(0, 0);
  const fromMs = (object: number) => Math.max(startMs, validFromMs[object]);
  const toMs = (object: number) => Math.min(endMs, validToMs[object]);
  const primaryBands = Array.from(primaries, (object) =>
    primaryBand({ records, place: object }, epochMs[object], fromMs(object), toMs(object)),
  );
  const bands = Array.from(others, (object) =>
    nearEarthBand(secularTerms, TERMS_SIZE * object, epochMs[object], fromMs(object), toMs(object)),
  );
  const passes = sieve(bands, primaryBands, missKm);
  return others.filter((_, k) => passes[k] === 1);
}

/** @returns `undefined` where there is no pair to search */
function partOf(
  objects: SearchObjects,
  rules: SearchRules,
  primaries: Int32Array,
  others: Int32Array,
): PartSearch | undefined {
  const hasPairs = others.length > 0 || (rules.withinPrimaries && primaries.length > 1);
  if (primaries.length === 0 || !hasPairs) return undefined;
  const indices = Int32Array.from([...primaries, ...others]);
  const placeOf = new Map(Array.from(indices, (object, place) => [object, place]));
  const skippedPairs = new Set<number>();
  for (const key of rules.skippedPairs) {
    const first = placeOf.get(Math.floor(key / objects.count));
    const second = placeOf.get(key % objects.count);
    if (first === undefined || second === undefined) continue;
    skippedPairs.add(pairKey(first, second, indices.length));
  }
  const pick = (values: Float64Array) => Float64Array.from(indices, (object) => values[object]);
  return {
    indices,
    rules: { ...rules, skippedPairs },
    objects: {
      count: indices.length,
      primaryCount: primaries.length,
      records: pickRecords(objects.records, indices),
      secularTerms: termsOf(objects, indices),
      epochMs: pick(objects.epochMs),
      eccentricity: pick(objects.eccentricity),
      perigeeRadiusKm: pick(objects.perigeeRadiusKm),
      validFromMs: pick(objects.validFromMs),
      validToMs: pick(objects.validToMs),
    },
  };
}

function termsOf({ secularTerms }: SearchObjects, indices: Int32Array): Float64Array {
  const terms = new Float64Array(TERMS_SIZE * indices.length);
  indices.forEach((object, place) => {
    const from = TERMS_SIZE * object;
    terms.set(secularTerms.subarray(from, from + TERMS_SIZE), TERMS_SIZE * place);
  });
  return terms;
}
