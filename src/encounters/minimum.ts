import type { PlacedRecord } from '../ephemeris/sgp4-records.js';
import { relativeStateAt, squareOf } from './relative-state.js';

/** A minimum of the distance of a pair. */
export type Minimum = { readonly tcaMs: number; readonly missKm: number };

/** A time in milliseconds since 1970 resolves 0.00024 ms in one double. */
export const SETTLED_MS = 5e-4;

/** TCA to the microsecond. */
export function roundTca(timeMs: number): number {
  return Math.round(timeMs * 1000) / 1000;
}

const relative = new Float64Array(6);

/** What a minimum is like whose time is known; `undefined` where SGP4 gives no state there. */
export function minimumAt(object1: PlacedRecord, object2: PlacedRecord, tcaMs: number): Minimum | undefined {
  if (!relativeStateAt(object1, object2, tcaMs, relative)) return undefined;
  return { tcaMs, missKm: Math.sqrt(squareOf(relative)) };
}
