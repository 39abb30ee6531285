import { createRoom, freeRoom, sgp4Module, writeRun } from './sgp4-module.js';
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
  const { module } = sgp4Module();
  const count = members.length;
  const room = createRoom(count, mostTimes);
  members.forEach((place, k) => {
    copyRecord(records, place, module.HEAPF64.subarray(room.records / 8), k);
  });
  return {
    objectCount: count,
    dispose: () => freeRoom(room),
    statesAt: (timesMs) => {
      if (timesMs.length > mostTimes) throw new RangeError(`${timesMs.length} times, expected ${mostTimes}`);
      const days = module.HEAPF64.subarray(room.days / 8);
      timesMs.forEach((timeMs, k) => {
        days[k] = (timeMs - records.originMs) / MS_PER_DAY;
      });
      writeRun(room, timesMs.length);
      module._compute(room.run);
      const { buffer } = module.HEAP8;
      const states = count * timesMs.length;
      return {
        position: new Float64Array(buffer, room.positions, 3 * states),
        velocity: new Float64Array(buffer, room.velocities, 3 * states),
        error: new Int8Array(buffer, room.errors, states),
      };
    },
  };
}
