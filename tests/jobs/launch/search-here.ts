import { distinctApproaches } from '../../../src/encounters/closest-approach.js';
import { slabCount } from '../../../src/encounters/search-problem.js';
import { createSlabSearcher, searchSlab } from '../../../src/encounters/search-slab.js';
import { loadSgp4 } from '../../../src/ephemeris/sgp4-module.js';
import { assessApproaches } from '../../../src/jobs/assess-approach.js';
import { createEncounterRecords, type EncounterRecords } from '../../../src/jobs/encounter-records.js';
import { rulesOfPlan, type SearchPlan } from '../../../src/jobs/search-plan.js';

/** Searches a plan in this thread. */
export async function searchHere(plan: SearchPlan): Promise<EncounterRecords> {
  await loadSgp4();
  const { objects } = plan;
  const rules = rulesOfPlan(plan);
  const searcher = createSlabSearcher(objects, rules);
  const found = Array.from({ length: slabCount(rules) }, (_, slab) => searchSlab(searcher, slab).approaches);
  const records = createEncounterRecords();
  assessApproaches(distinctApproaches(found.flat(), objects.count), plan, records);
  return records;
}
