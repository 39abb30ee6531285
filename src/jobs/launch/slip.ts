import type { ElementSet } from '../../elements/element-set.js';
import { InputError } from '../../input-error.js';
import type { SlipRange } from './launch-options.js';

/** Nominal mean angular velocity of the Earth, rad/s (IERS and GRS80; figure from memory). */
const EARTH_ROTATION_RAD_PER_S = 7.292115e-5;

/** A day of liftoffs by the minute, and one. */
export const MOST_LIFTOFFS = 1441;

const MS_PER_MINUTE = 60_000;

/**
 * The set of an object whose launch slips. Seen from the launch site nothing changes, so everything comes
 * later by the slip, and the orbit plane is turned east by what the Earth turns in it; drag and the shape of
 * the Earth are the same for every direction of the node.
 *
 * @param slipMs may be negative
 */
export function slippedSet(set: ElementSet, slipMs: number): ElementSet {
  const turnedDeg = ((EARTH_ROTATION_RAD_PER_S * slipMs) / 1000) * (180 / Math.PI);
  return {
    ...set,
    epochMs: set.epochMs + slipMs,
    rightAscensionDeg: (((set.rightAscensionDeg + turnedDeg) % 360) + 360) % 360,
  };
}

/**
 * The slips of all candidate liftoffs in time order, whole milliseconds; the nominal liftoff (0) is always
 * one of them.
 *
 * @throws InputError for more than `MOST_LIFTOFFS`
 */
export function slipsOf(range: SlipRange | undefined): number[] {
  if (range === undefined) return [0];
  const { fromMin, toMin, everyMin } = range;
  // A hair of room, so that rounding does not cost the last one.
  const steps = Math.floor((toMin - fromMin) / everyMin + 1e-9);
  if (steps >= MOST_LIFTOFFS) {
    throw new InputError(
      `--slip-from ${fromMin} to --slip-to ${toMin} every ${everyMin} min makes ${steps + 1} liftoffs: at most ${MOST_LIFTOFFS} are screened at once`,
    );
  }
  const slips = Array.from({ length: steps + 1 }, (_, k) =>
    Math.round((fromMin + k * everyMin) * MS_PER_MINUTE),
  );
  return [...new Set([...slips, 0])].sort((a, b) => a - b);
}
