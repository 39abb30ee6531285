import { BulkPropagator, createSingleThreadRuntime, EciBaseCalculator, type SatRec } from 'satellite.js';
import { setRecords } from './bulk-records.js';

/**
 * SGP4 states of many objects at common times by the WebAssembly propagator of satellite.js. It takes
 * times as a Julian date in one double, which moves a state along its path by up to 0.4 m: good for
 * segments of a search that allows for it, not for a closest approach.
 */
export type BulkNodes = {
  readonly objectCount: number;
  /** Gives the memory back. */
  readonly dispose: () => void;
  /**
   * @param timesMs the common times, whole milliseconds of UTC since 1970-01-01
   * @returns views that the next call overwrites: for object i and time k, `position` and `velocity` hold
   * three components at 3 (i x times + k), km and km/s, TEME; `error` is 0 where there is a state
   */
  readonly statesAt: (timesMs: readonly number[]) => {
    readonly position: Float64Array;
    readonly velocity: Float64Array;
    readonly error: Int8Array;
  };
};

let runtime: Awaited<ReturnType<typeof createSingleThreadRuntime>> | undefined;

/** Loads the WebAssembly module once for this thread. */
export async function loadBulkPropagator(): Promise<void> {
  runtime ??= await createSingleThreadRuntime();
}

/**
 * Takes over the records of a group of objects. `loadBulkPropagator` must have been awaited.
 *
 * @param mostTimes largest number of common times asked for in one call
 */
export function createBulkNodes(records: readonly SatRec[], mostTimes: number): BulkNodes {
  if (runtime === undefined) throw new Error('loadBulkPropagator() has not been awaited');
  const propagator = new BulkPropagator({
    runtime,
    calculators: [new EciBaseCalculator()],
    satRecsCount: records.length,
    datesCount: mostTimes,
  });
  setRecords(propagator, runtime.module, records);
  return {
    objectCount: records.length,
    dispose: () => propagator.dispose(),
    statesAt: (timesMs) => {
      propagator.setDates(timesMs.map((timeMs) => new Date(timeMs)));
      propagator.run({ eci: { communityDecayCheckEnabled: true } });
      return propagator.getRawOutput().eci;
    },
  };
}
