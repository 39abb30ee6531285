import { parentPort, workerData } from 'node:worker_threads';
import { createSlabSearcher, searchSlab } from '../encounters/search-slab.js';
import { loadBulkPropagator } from '../ephemeris/bulk-nodes.js';
import { assessApproaches } from './assess-approach.js';
import { createEncounterRecords, FIELDS } from './encounter-records.js';
import { objectsOfPlan, rulesOfPlan, type SearchPlan } from './search-plan.js';

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

/** Runs in a worker thread: takes slab numbers, one at a time, and answers each with its encounters. */
async function serve(plan: SearchPlan): Promise<void> {
  if (parentPort === null) throw new Error('search-worker runs in a worker thread only');
  const port = parentPort;
  await loadBulkPropagator();
  const objects = objectsOfPlan(plan);
  const searcher = createSlabSearcher(objects, rulesOfPlan(plan));
  port.on('message', (slab: number) => {
    const { approaches, ...facts } = searchSlab(searcher, slab);
    const records = createEncounterRecords(approaches.length + 1);
    assessApproaches(approaches, objects, plan, records);
    const used = records.data.slice(0, FIELDS * records.size);
    const answer: SlabAnswer = { slab, records: used, ...facts };
    port.postMessage(answer, [used.buffer]);
  });
}

await serve(workerData as SearchPlan);
