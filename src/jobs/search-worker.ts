import { parentPort } from 'node:worker_threads';
import { createSlabSearcher, disposeSlabSearcher, searchSlab } from '../encounters/search-slab.js';
import { loadSgp4 } from '../ephemeris/sgp4-module.js';
import { assessApproaches } from './assess-approach.js';
import { createEncounterRecords, FIELDS } from './encounter-records.js';
import { rulesOfPlan, type SearchPlan } from './search-plan.js';
import type { ThreadMessage } from './worker-threads.js';

/** What a worker answers for one slab. */
export type SlabAnswer = {
  readonly slab: number;
  /** `FIELDS` doubles for each encounter, by TCA. */
  readonly records: Float64Array<ArrayBuffer>;
  readonly failures: readonly { readonly object: number; readonly lastMs: number }[];
  readonly stepS: number | undefined;
  readonly worstDefectKm: number;
  readonly pairsRefined: number;
};

/** Runs in a worker thread: takes one slab at a time and answers it with its encounters. */
async function serve(): Promise<void> {
  if (parentPort === null) throw new Error('search-worker runs in a worker thread only');
  const port = parentPort;
  await loadSgp4();
  let search: PlanSearch | undefined;
  port.on('message', ({ brief: plan, question: slab }: ThreadMessage<SearchPlan, number>) => {
    if (plan !== undefined) {
      search?.dispose();
      search = searchOf(plan);
    }
    if (search === undefined) throw new Error(`slab ${slab} was asked for before any plan came`);
    const answer = search.answerTo(slab);
    port.postMessage(answer, [answer.records.buffer]);
  });
}

type PlanSearch = { readonly answerTo: (slab: number) => SlabAnswer; readonly dispose: () => void };

function searchOf(plan: SearchPlan): PlanSearch {
  const searcher = createSlabSearcher(plan.objects, rulesOfPlan(plan));
  const answerTo = (slab: number): SlabAnswer => {
    const { approaches, ...facts } = searchSlab(searcher, slab);
    const records = createEncounterRecords(approaches.length + 1);
    assessApproaches(approaches, plan, records);
    return { slab, records: records.data.slice(0, FIELDS * records.size), ...facts };
  };
  return { answerTo, dispose: () => disposeSlabSearcher(searcher) };
}

await serve();
