import { Worker } from 'node:worker_threads';
import type { ElementSet } from '../../src/elements/element-set.js';
import { toOmm } from './omm.js';

const STEP_MS = 60_000;
/** Times in one call of the propagator: its output for 100 000 objects stays under 50 MB. */
const BATCH = 10;
/** Times that each thread works through in one measurement. */
const TIMES_PER_THREAD = 30;

/** The yardstick of one workload, ready to be measured several times. */
export type Floor = {
  /** Seconds that the whole window would take, from a part of it measured now. */
  readonly measureS: () => Promise<number>;
  readonly close: () => Promise<void>;
};

/**
 * Position and velocity of every object on a grid of 60 s over the window, by satellite.js's bulk propagator in as
 * many threads as the screening uses, each with its share of the times. Setting up is not counted.
 */
export async function createFloor(
  sets: readonly ElementSet[],
  startMs: number,
  days: number,
  threads: number,
): Promise<Floor> {
  const records = sets.map(toOmm);
  const workers = Array.from(
    { length: threads },
    () =>
      new Worker(new URL('./floor-worker.mjs', import.meta.url), {
        workerData: { records, startMs, stepMs: STEP_MS, batch: BATCH },
      }),
  );
  const answers = () =>
    Promise.all(workers.map((worker) => new Promise((done) => worker.once('message', done))));
  await answers();
  const times = Math.floor((days * 86_400_000) / STEP_MS) + 1;
  return {
    measureS: async () => {
      const started = performance.now();
      const all = answers();
      workers.forEach((worker, i) => {
        worker.postMessage({ from: i * TIMES_PER_THREAD, count: TIMES_PER_THREAD });
      });
      await all;
      const measuredS = (performance.now() - started) / 1000;
      return (measuredS * times) / (TIMES_PER_THREAD * threads);
    },
    close: async () => {
      await Promise.all(workers.map((worker) => worker.terminate()));
    },
  };
}
