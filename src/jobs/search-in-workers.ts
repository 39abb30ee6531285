import { slabCount } from '../encounters/search-problem.js';
import { SLAB_S } from '../ephemeris/node-spacing.js';
import {
  createEncounterRecords,
  type EncounterRecords,
  extendRecords,
  FIELD,
  FIELDS,
} from './encounter-records.js';
import type { JobPorts } from './screen-options.js';
import type { SearchPlan } from './search-plan.js';
import type { SlabAnswer } from './search-worker.js';
import { withWorkerThreads } from './worker-threads.js';

export type SearchOutcome = {
  /** Every encounter once, in the order of the slabs and of TCA within them. */
  readonly records: EncounterRecords;
  /** Objects that SGP4 gave up on in the window, with the last time that has a state. */
  readonly lastMsOf: ReadonlyMap<number, number>;
  /** What the search did, for the record of the run. */
  readonly slabs: number;
  /** Steps of the grid; `undefined` where nothing was stepped. */
  readonly shortestStepS: number | undefined;
  readonly longestStepS: number | undefined;
  readonly worstDefectKm: number;
  readonly pairsRefined: number;
};

const MS_PER_DAY = 86_400_000;
/** Minima of one pair closer than this in time are one that two slabs found. */
const SAME_MS = 1;

export type SearchWorkers = {
  /**
   * Searches the window of a plan slab by slab. Slabs do not depend on the number of workers and are put
   * together in their order, so that the outcome is the same for any number; each worker has one slab in hand at
   * a time, which bounds memory.
   */
  readonly search: (plan: SearchPlan) => Promise<SearchOutcome>;
};

/**
 * Starts threads that search for as long as `use` takes.
 *
 * @param workers how many: more than there are slabs to search are of no use
 */
export function withSearchWorkers<Result>(
  workers: number,
  ports: Pick<JobPorts, 'onStop' | 'progress'>,
  use: (workers: SearchWorkers) => Promise<Result>,
): Promise<Result> {
  const script = new URL('./search-worker.js', import.meta.url);
  return withWorkerThreads<SearchPlan, number, SlabAnswer, Result>(script, workers, ports, ({ ask }) =>
    use({ search: (plan) => searchSlabs(plan, (slab) => ask(plan, slab), ports) }),
  );
}

async function searchSlabs(
  plan: SearchPlan,
  answerTo: (slab: number) => Promise<SlabAnswer>,
  ports: Pick<JobPorts, 'progress'>,
): Promise<SearchOutcome> {
  const slabs = slabCount(plan);
  const days = (plan.endMs - plan.startMs) / MS_PER_DAY;
  let done = 0;
  let encounters = 0;
  const answers = await Promise.all(
    Array.from({ length: slabs }, async (_, slab) => {
      const answer = await answerTo(slab);
      done++;
      encounters += answer.records.length / FIELDS;
      const doneDays = Math.min((done * SLAB_S * 1000) / MS_PER_DAY, days);
      ports.progress({
        stage: 'search',
        fraction: done / slabs,
        detail: `${plan.hardBodyRadiusM.length} objects, ${doneDays.toFixed(1)} of ${days.toFixed(1)} d, ${encounters} encounters`,
      });
      return answer;
    }),
  );
  return joined(answers, plan.hardBodyRadiusM.length, plan.startMs);
}

function joined(answers: readonly SlabAnswer[], objectCount: number, startMs: number): SearchOutcome {
  const lastMsOf = new Map<number, number>();
  for (const { failures } of answers) {
    for (const { object, lastMs } of failures) {
      lastMsOf.set(object, Math.min(lastMs, lastMsOf.get(object) ?? Number.POSITIVE_INFINITY));
    }
  }
  const records = createEncounterRecords(
    answers.reduce((sum, each) => sum + each.records.length / FIELDS, 1),
    SharedArrayBuffer,
  );
  const edge = new Map<number, number>();
  for (const { records: data, slab } of answers) {
    // Only what lies at the very end of a slab can be found by the next one too.
    const edgeMs = startMs + (slab + 1) * SLAB_S * 1000 - 2 * SAME_MS;
    const latest = new Map<number, number>();
    for (let from = 0; from < data.length; from += FIELDS) {
      const first = data[from + FIELD.first];
      const second = data[from + FIELD.second];
      const tcaMs = data[from + FIELD.tcaMs];
      // An object that SGP4 gave up on once is gone, even where later states come out again.
      if (tcaMs > (lastMsOf.get(first) ?? Number.POSITIVE_INFINITY)) continue;
      if (tcaMs > (lastMsOf.get(second) ?? Number.POSITIVE_INFINITY)) continue;
      const key = first * objectCount + second;
      if (tcaMs >= edgeMs) latest.set(key, tcaMs);
      const before = edge.get(key);
      if (before !== undefined && tcaMs - before <= SAME_MS) continue;
      const at = extendRecords(records, 1);
      records.data.set(data.subarray(from, from + FIELDS), at);
    }
    edge.clear();
    for (const [key, tcaMs] of latest) edge.set(key, tcaMs);
  }
  const steps = answers.flatMap(({ stepS }) => (stepS === undefined ? [] : [stepS]));
  return {
    records,
    lastMsOf,
    slabs: answers.length,
    shortestStepS: steps.length === 0 ? undefined : Math.min(...steps),
    longestStepS: steps.length === 0 ? undefined : Math.max(...steps),
    worstDefectKm: Math.max(...answers.map((answer) => answer.worstDefectKm)),
    pairsRefined: answers.reduce((sum, answer) => sum + answer.pairsRefined, 0),
  };
}
