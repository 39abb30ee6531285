import { recordPositionsAt } from '../ephemeris/record-states.js';
import type { PlacedRecord } from '../ephemeris/sgp4-records.js';

/**
 * Positions of one object at whole multiples of a step, worked out a stretch at a time when first asked for: the
 * objects of a train are each part of several pairs, which ask for the same times.
 */
export type PositionSamples = PlacedRecord & {
  readonly stepMs: number;
  /** Two stretches, of even and of odd number. */
  readonly positions: Float64Array;
  /** Numbers of the stretches held. */
  readonly held: Float64Array;
};

const STRETCH = 16;

export function createPositionSamples({ records, place }: PlacedRecord, stepMs: number): PositionSamples {
  return {
    records,
    place,
    stepMs,
    positions: new Float64Array(2 * 3 * STRETCH),
    held: new Float64Array(2).fill(Number.NaN),
  };
}

/**
 * Where in `positions` the sample of a number lies: x, y, z (km, TEME) at `number` times the step since
 * 1970-01-01 UTC, NaN where SGP4 gives no state.
 */
export function placeOfSample(samples: PositionSamples, number: number): number {
  const stretch = Math.floor(number / STRETCH);
  const half = stretch & 1;
  const from = 3 * STRETCH * half;
  if (samples.held[half] !== stretch) {
    samples.held[half] = stretch;
    const { records, place, stepMs, positions } = samples;
    recordPositionsAt(records, place, stretch * STRETCH * stepMs, stepMs, STRETCH, positions, from);
  }
  return from + 3 * (number - stretch * STRETCH);
}
