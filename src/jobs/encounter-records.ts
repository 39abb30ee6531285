/**
 * Encounters as they pass between threads and are kept by the hundred thousand: flat doubles, `FIELDS` each.
 * NaN stands for a figure that cannot be given.
 */
export const FIELDS = 28;

export const FIELD = {
  /** Index of object 1 and of object 2 among the objects of the plan. */
  first: 0,
  second: 1,
  tcaMs: 2,
  /** TEME states at TCA: km and km/s, six doubles each. */
  state1: 3,
  state2: 9,
  missKm: 15,
  probability: 16,
  probabilityFoster: 17,
  probabilityMax: 18,
  mahalanobis: 19,
  /** Factor on the sigmas at which the probability peaks, and the probability at half and twice the sigmas. */
  peakScale: 20,
  probabilityAtHalf: 21,
  probabilityAtTwice: 22,
  /** Sum of a bit for each remark, as `remarkBits`. */
  remarks: 23,
  /** Index into `PROBABILITY_METHODS`. */
  method: 24,
  entryMs: 25,
  exitMs: 26,
  /** At least one collision over the pair's encounters in the window; filled in when all are known. */
  pairProbability: 27,
} as const;

/** `''` where there is no probability. The first is in the words of CCSDS 508.0-B-1. */
export const PROBABILITY_METHODS = ['', 'FOSTER-1992', 'ADJOINING-TUBES', 'FIRST-ENTRY'] as const;

export type ProbabilityMethod = (typeof PROBABILITY_METHODS)[number];

/** Grows as encounters come in; `size` counts encounters. */
export type EncounterRecords = { data: Float64Array; size: number };

/** @param memory `SharedArrayBuffer` where threads are to read what fits into the capacity without a copy */
export function createEncounterRecords(
  capacity = 256,
  memory: typeof ArrayBuffer | typeof SharedArrayBuffer = ArrayBuffer,
): EncounterRecords {
  return { data: new Float64Array(new memory(8 * FIELDS * capacity)), size: 0 };
}

/** Makes room for `more` encounters; returns the offset of the first. */
export function extendRecords(records: EncounterRecords, more: number): number {
  const needed = FIELDS * (records.size + more);
  if (needed > records.data.length) {
    const larger = new Float64Array(Math.max(needed, 2 * records.data.length));
    larger.set(records.data.subarray(0, FIELDS * records.size));
    records.data = larger;
  }
  const at = FIELDS * records.size;
  records.size += more;
  return at;
}
