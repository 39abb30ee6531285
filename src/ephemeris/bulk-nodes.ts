import { sgp4Module, writeRun } from './sgp4-module.js';
import { copyRecord, type Sgp4Records } from './sgp4-records.js';

/** SGP4 states of many objects at common times. */
export type BulkNodes = {
  readonly objectCount: number;
  /** Gives the memory back. */
  readonly dispose: () => void;
  /**
   * @param timesMs the common times, milliseconds of UTC since 1970-01-01
   * @returns views that the next call of any overwrites: for object i and time k, `position` and `velocity` hold
   * three components at 3 (i x times + k), km and km/s, TEME; `error` is 0 where there is a state
   */
  readonly statesAt: (timesMs: readonly number[]) => {
    readonly position: Float64Array;
    readonly velocity: Float64Array;
    readonly error: Int8Array;
  };
};

const MS_PER_DAY = 86_400_000;

/**
 * Takes over the records of a group of objects. `loadSgp4` must have been awaited.
 *
 * @param members places among the records
 * @param mostTimes largest number of common times asked for in one call
 */
export function createBulkNodes(
  records: Sgp4Records,
  members: Int32Array | readonly number[],
  mostTimes: number,
): BulkNodes {
  const { module, runBytes } = sgp4Module();
  const { size, originMs } = records;
  const count = members.length;
  const most = count * mostTimes;
  const run = module._calloc_one(runBytes);
  const held = module._malloc(8 * Math.max(1, size * count));
  const days = module._malloc(8 * mostTimes);
  const output = module._malloc(Math.max(8, 49 * most));
  members.forEach((place, k) => {
    copyRecord(records, place, module.HEAPF64.subarray(held / 8), k);
  });
  return {
    objectCount: count,
    dispose: () => {
      for (const place of [run, held, days, output]) module._free(place);
    },
    statesAt: (timesMs) => {
      if (timesMs.length > mostTimes) throw new RangeError(`${timesMs.length} times, expected ${mostTimes}`);
      const heap = module.HEAPF64;
      timesMs.forEach((timeMs, k) => {
        heap[days / 8 + k] = (timeMs - originMs) / MS_PER_DAY;
      });
      const states = count * timesMs.length;
      const velocities = output + 24 * states;
      const errors = velocities + 24 * states;
      writeRun(run, {
        records: held,
        recordCount: count,
        days,
        dayCount: timesMs.length,
        positions: output,
        velocities,
        errors,
      });
      module._compute(run);
      const { buffer } = module.HEAP8;
      return {
        position: new Float64Array(buffer, output, 3 * states),
        velocity: new Float64Array(buffer, velocities, 3 * states),
        error: new Int8Array(buffer, errors, states),
      };
    },
  };
}
