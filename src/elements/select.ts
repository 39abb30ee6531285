import type { ElementSet, UnusedElements } from './element-set.js';
import { formatUtc } from './utc.js';

export type Selection = {
  /** One set an object, ordered by catalog number; sets without a number last, in their given order. */
  readonly fleet: readonly ElementSet[];
  /** As `fleet`, without the objects of the fleet. */
  readonly catalog: readonly ElementSet[];
  /** In the given order, those of the fleet first. */
  readonly superseded: readonly UnusedElements[];
};

/**
 * Chooses one element set for each object: the newest with its epoch not after the start, or, where all lie
 * after it, the nearest; of equal epochs the first. An object of the fleet that is in the catalog too is
 * screened once, on the elements of the fleet. Objects without a catalog number are never the same object.
 *
 * @param startMs start of the window, milliseconds of UTC since 1970-01-01
 */
export function selectSets({
  fleet,
  catalog,
  startMs,
}: {
  readonly fleet: readonly ElementSet[];
  readonly catalog: readonly ElementSet[];
  readonly startMs: number;
}): Selection {
  if (!Number.isFinite(startMs)) throw new RangeError(`startMs is ${startMs}, expected a finite number`);
  const fleetWinners = winnersOf(fleet, startMs);
  const catalogWinners = winnersOf(catalog, startMs);
  const superseded: UnusedElements[] = [];
  const chosenFleet = fleet.filter((set) => {
    const winner = fleetWinners.get(set.designator);
    if (winner === undefined || winner === set) return true;
    superseded.push(supersededBy(winner, set, reasonFor(winner, set, startMs)));
    return false;
  });
  const chosenCatalog = catalog.filter((set) => {
    const own = fleetWinners.get(set.designator);
    const winner = catalogWinners.get(set.designator);
    if (own === undefined && (winner === undefined || winner === set)) return true;
    if (own !== undefined) superseded.push(supersededBy(own, set, 'the fleet has elements of its own'));
    else if (winner !== undefined)
      superseded.push(supersededBy(winner, set, reasonFor(winner, set, startMs)));
    return false;
  });
  return { fleet: chosenFleet.sort(byDesignator), catalog: chosenCatalog.sort(byDesignator), superseded };
}

function winnersOf(sets: readonly ElementSet[], startMs: number): Map<string, ElementSet> {
  const winners = new Map<string, ElementSet>();
  for (const set of sets) {
    if (set.designator === '') continue;
    const best = winners.get(set.designator);
    if (best === undefined || isBetter(set.epochMs, best.epochMs, startMs)) winners.set(set.designator, set);
  }
  return winners;
}

function isBetter(epochMs: number, bestMs: number, startMs: number): boolean {
  if (epochMs <= startMs) return bestMs > startMs || epochMs > bestMs;
  return bestMs > startMs && epochMs < bestMs;
}

function reasonFor(winner: ElementSet, set: ElementSet, startMs: number): string {
  if (winner.epochMs === set.epochMs) return 'same epoch, read first';
  if (winner.epochMs > startMs) return 'nearer to the start';
  return set.epochMs > startMs ? 'the newest not after the start' : 'newer, not after the start';
}

function supersededBy(winner: ElementSet, set: ElementSet, why: string): UnusedElements {
  const { file, line } = winner.source;
  return {
    source: set.source,
    designator: set.designator,
    reason: 'superseded',
    detail: `epoch ${formatUtc(set.epochMs)}; used instead: ${file}:${line}, epoch ${formatUtc(winner.epochMs)} (${why})`,
  };
}

/** Sorting is stable, so that sets without a number stay in their given order. */
function byDesignator(a: ElementSet, b: ElementSet): number {
  return rank(a) - rank(b);
}

function rank({ designator }: ElementSet): number {
  return designator === '' ? Number.MAX_SAFE_INTEGER : Number(designator);
}
