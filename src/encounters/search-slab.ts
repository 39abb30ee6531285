import { type ClosestApproach, distinctApproaches } from './closest-approach.js';
import { createGridSearcher, type GridSearcher, searchGrid } from './grid-search.js';
import { createPairSearcher, type PairSearcher, searchPairs } from './pair-search.js';
import type { SearchObjects, SearchRules } from './search-problem.js';
import { splitSearch } from './split-search.js';

export type SlabResult = {
  /** By TCA, then by objects. */
  readonly approaches: readonly ClosestApproach[];
  /** Objects that SGP4 gave up on in this slab, with the last millisecond that has a state. */
  readonly failures: readonly { readonly object: number; readonly lastMs: number }[];
  /** Step of the grid, the longest where there are two; `undefined` where nothing was stepped. */
  readonly stepS: number | undefined;
  /** Largest distance measured between interpolated paths and SGP4. */
  readonly worstDefectKm: number;
  readonly pairsRefined: number;
};

export type SlabSearcher = {
  readonly objects: SearchObjects;
  readonly grids: readonly { readonly searcher: GridSearcher; readonly indices: Int32Array }[];
  readonly pairs: PairSearcher | undefined;
};

/** `loadSgp4` must have been awaited in this thread. */
export function createSlabSearcher(objects: SearchObjects, rules: SearchRules): SlabSearcher {
  const { byPairs, onGrids } = splitSearch(objects, rules);
  return {
    objects,
    grids: onGrids.map(({ indices, ...part }) => ({
      searcher: createGridSearcher(part.objects, part.rules),
      indices,
    })),
    pairs: byPairs === undefined ? undefined : createPairSearcher(objects, rules, byPairs),
  };
}

/** Gives back what a searcher holds outside of JavaScript. */
export function disposeSlabSearcher({ grids }: SlabSearcher): void {
  for (const { searcher } of grids) searcher.trackMaker.dispose();
}

/** Finds every closest approach of one slab of the window. */
export function searchSlab({ objects, grids, pairs }: SlabSearcher, slabIndex: number): SlabResult {
  const approaches: ClosestApproach[] = [];
  const lastMsOf = new Map<number, number>();
  let stepS: number | undefined;
  let worstDefectKm = 0;
  let pairsRefined = 0;
  for (const { searcher, indices } of grids) {
    const found = searchGrid(searcher, slabIndex);
    for (const { first: a, second: b, ...approach } of found.approaches) {
      const first = Math.min(indices[a], indices[b]);
      approaches.push({ first, second: indices[a] + indices[b] - first, ...approach });
    }
    for (const { object, lastMs } of found.failures) lastMsOf.set(indices[object], lastMs);
    stepS = Math.max(stepS ?? 0, found.stepS);
    worstDefectKm = Math.max(worstDefectKm, found.worstDefectKm);
    pairsRefined += found.pairsRefined;
  }
  if (pairs !== undefined) {
    const found = searchPairs(pairs, slabIndex);
    for (const approach of found.approaches) approaches.push(approach);
    pairsRefined += found.pairsRefined;
  }
  return {
    approaches: distinctApproaches(approaches, objects.count),
    failures: [...lastMsOf]
      .map(([object, lastMs]) => ({ object, lastMs }))
      .sort((a, b) => a.object - b.object),
    stepS,
    worstDefectKm,
    pairsRefined,
  };
}
