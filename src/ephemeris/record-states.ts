import { createRoom, type NativeModule, type Room, sgp4Module } from './sgp4-module.js';
import { copyRecord, placeOf, type Sgp4Records } from './sgp4-records.js';

/** Records that lie in the module's memory at a time: pairs come in turns, and each is asked for several times. */
const SLOTS = 16;
const MS_PER_DAY = 86_400_000;

/** Where single states are worked out. */
type Slots = {
  readonly module: NativeModule;
  /** For one record at one time each. */
  readonly rooms: readonly Room[];
  /** Places in a record: time of the integrator of resonances, and the mean elements of the latest run. */
  readonly integrated: number;
  readonly means: readonly number[];
  readonly heldPlace: Int32Array;
  readonly heldRecords: (Sgp4Records | undefined)[];
};

let slots: Slots | undefined;

/**
 * The true SGP4 state of one record at one time. It depends on nothing asked before: resonances of deep-space
 * orbits are integrated anew from the epoch. `loadSgp4` must have been awaited.
 *
 * @param place of the record among the records
 * @param timeMs milliseconds of UTC since 1970-01-01; near the records' origin nanoseconds are told apart
 * @param out x, y, z (km) and vx, vy, vz (km/s), TEME, from `offset` on
 * @returns false where SGP4 gives no state, or one of an orbit that its drag term has long eaten up
 */
export function recordStateAt(
  records: Sgp4Records,
  place: number,
  timeMs: number,
  out: Float64Array,
  offset = 0,
): boolean {
  slots ??= createSlots();
  const room = run(slots, records, place, timeMs);
  if (room === undefined) return false;
  const state = room.positions / 8;
  const computed = slots.module.HEAPF64;
  let sum = 0;
  for (let k = 0; k < 6; k++) {
    const value = computed[state + k];
    out[offset + k] = value;
    sum += value;
  }
  return Number.isFinite(sum);
}

/** Places in what `recordMeansAt` gives: semi-major axis (Earth radii), eccentricity, anomaly, motion (radians a minute). */
export const MEAN_AXIS = 0;
export const MEAN_ECCENTRICITY = 1;
export const MEAN_ANOMALY = 2;
export const MEAN_MOTION = 3;
const MEANS = ['am', 'em', 'mm', 'nm'];

/**
 * Mean elements of one record at one time, as SGP4 has them before its periodic terms. `loadSgp4` must have been
 * awaited.
 *
 * @param out four numbers, at `MEAN_AXIS` and the others
 * @returns as `recordStateAt`
 */
export function recordMeansAt(
  records: Sgp4Records,
  place: number,
  timeMs: number,
  out: Float64Array,
): boolean {
  slots ??= createSlots();
  const room = run(slots, records, place, timeMs);
  if (room === undefined) return false;
  const at = room.records / 8;
  for (const [k, mean] of slots.means.entries()) out[k] = slots.module.HEAPF64[at + mean];
  return true;
}

/** Times that positions are worked out for at once. */
const MOST_TIMES = 16;

/** For one record at several times. */
let series: Room | undefined;

/**
 * Positions of one record at equal steps, in two thirds of the time that single states take; of them, only
 * resonances of deep-space orbits hang on where the steps start. `loadSgp4` must have been awaited.
 *
 * @param count at most 16
 * @param out x, y, z (km), TEME, for each time, from `offset` on; NaN where SGP4 gives no state
 */
export function recordPositionsAt(
  records: Sgp4Records,
  place: number,
  startMs: number,
  stepMs: number,
  count: number,
  out: Float64Array,
  offset: number,
): void {
  if (count > MOST_TIMES) throw new RangeError(`${count} times, expected up to ${MOST_TIMES}`);
  const { module } = sgp4Module();
  series ??= createRoom(1, MOST_TIMES);
  const { run, days, positions, errors } = series;
  const heap = module.HEAPF64;
  copyRecord(records, place, heap.subarray(series.records / 8), 0);
  for (let k = 0; k < MOST_TIMES; k++) {
    heap[days / 8 + k] = (startMs + Math.min(k, count - 1) * stepMs - records.originMs) / MS_PER_DAY;
  }
  module._compute(run);
  const computed = module.HEAPF64;
  for (let k = 0; k < count; k++) {
    const isThere = module.HEAP8[errors + k] === 0;
    for (let axis = 0; axis < 3; axis++) {
      out[offset + 3 * k + axis] = isThere ? computed[positions / 8 + 3 * k + axis] : Number.NaN;
    }
  }
}

/** @returns the room with the state and, in its record, the mean elements; `undefined` where there are none */
function run(slots: Slots, records: Sgp4Records, place: number, timeMs: number): Room | undefined {
  const slot = place % SLOTS;
  const room = slots.rooms[slot];
  const heap = slots.module.HEAPF64;
  const { size } = records;
  const at = room.records / 8;
  if (slots.heldPlace[slot] !== place || slots.heldRecords[slot] !== records) {
    const { values } = records;
    const from = size * place;
    // Subarrays to copy from would be garbage, one for each.
    for (let k = 0; k < size; k++) heap[at + k] = values[from + k];
    slots.heldPlace[slot] = place;
    slots.heldRecords[slot] = records;
  }
  heap[at + slots.integrated] = 0;
  heap[room.days / 8] = (timeMs - records.originMs) / MS_PER_DAY;
  slots.module._compute(room.run);
  return slots.module.HEAP8[room.errors] === 0 ? room : undefined;
}

function createSlots(): Slots {
  return {
    module: sgp4Module().module,
    rooms: Array.from({ length: SLOTS }, () => createRoom(1, 1)),
    integrated: placeOf('atime'),
    means: MEANS.map(placeOf),
    heldPlace: new Int32Array(SLOTS).fill(-1),
    heldRecords: new Array(SLOTS).fill(undefined),
  };
}
