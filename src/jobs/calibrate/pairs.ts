import { AGE_KNOTS_DAYS } from '../../uncertainty/calibrate-age-knots.js';
import { isHeldBack } from './held-back.js';
import type { SetDifferences } from './set-differences.js';

const KNOTS = AGE_KNOTS_DAYS.length;
const MS_PER_DAY = 86_400_000;

/** The pairs of one object, by age knot; a pair is named by the position of its older set. */
export type ObjectPairs = {
  readonly fitted: ReadonlyArray<readonly number[]>;
  readonly heldBack: ReadonlyArray<readonly number[]>;
  /** Pairs left out because a maneuver lies between their sets. */
  readonly acrossManeuver: number;
  /** Pairs left out because only the newer set belongs to the part held back. */
  readonly intoHeldBack: number;
  /** By set: whether it is part of a pair. */
  readonly isPaired: Uint8Array;
};

/** @param stretches numbers of the stretches between maneuvers, by set */
export function pairsOf(
  designator: number,
  differences: SetDifferences,
  stretches: Uint32Array,
): ObjectPairs {
  const { epochMs, newer } = differences;
  const fitted: number[][] = AGE_KNOTS_DAYS.map(() => []);
  const heldBack: number[][] = AGE_KNOTS_DAYS.map(() => []);
  const isPaired = new Uint8Array(epochMs.length);
  let acrossManeuver = 0;
  let intoHeldBack = 0;
  for (let older = 0; older < epochMs.length; older++) {
    const isOlderHeldBack = isHeldBack(designator, epochMs[older]);
    for (let knot = 0; knot < KNOTS; knot++) {
      const partner = newer[older * KNOTS + knot];
      if (partner < 0) continue;
      if (stretches[older] !== stretches[partner]) {
        acrossManeuver++;
      } else if (!isOlderHeldBack && isHeldBack(designator, epochMs[partner])) {
        intoHeldBack++;
      } else {
        (isOlderHeldBack ? heldBack : fitted)[knot].push(older);
        isPaired[older] = 1;
        isPaired[partner] = 1;
      }
    }
  }
  return { fitted, heldBack, acrossManeuver, intoHeldBack, isPaired };
}

/** Age of the older set of a pair at the epoch of the newer one, days. */
export function pairAgeDays({ epochMs, newer }: SetDifferences, older: number, knot: number): number {
  return (epochMs[newer[older * KNOTS + knot]] - epochMs[older]) / MS_PER_DAY;
}

/** Difference of a pair along one axis (0 R, 1 T, 2 N), older minus newer, meters. */
export function pairDifferenceM({ rtnM }: SetDifferences, older: number, knot: number, axis: number): number {
  return rtnM[(older * KNOTS + knot) * 3 + axis];
}

/**
 * How many of the pairs follow one another without overlapping in time. Pairs that overlap share weather and
 * often a set: as samples they count for less than their number.
 *
 * @param olders positions of the older sets, ascending
 */
export function disjointCount(
  { epochMs, newer }: SetDifferences,
  olders: readonly number[],
  knot: number,
): number {
  let count = 0;
  let endMs = Number.NEGATIVE_INFINITY;
  for (const older of olders) {
    if (epochMs[older] < endMs) continue;
    count++;
    endMs = epochMs[newer[older * KNOTS + knot]];
  }
  return count;
}
