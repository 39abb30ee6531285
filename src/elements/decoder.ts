import type { ElementSet, UnusedElements } from './element-set.js';

export type ReadOptions = {
  /** The sets of a launch batch: the catalog number may be blank or zero, the designator is then `''`. */
  readonly batch?: boolean;
};

/** One record of a file: a verified set, or what is wrong with it. */
export type SetOrRejection = ElementSet | UnusedElements;

/** Turns the bytes of one file into records, piece by piece, so that a file of any length fits in memory. */
export type Decoder = {
  readonly push: (chunk: Buffer) => SetOrRejection[];
  readonly end: () => SetOrRejection[];
};

/** Tells a rejected record from a set. */
export function isUnused(record: SetOrRejection): record is UnusedElements {
  return 'reason' in record;
}
