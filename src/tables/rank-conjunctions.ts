import type { Conjunction } from './conjunction.js';

const NUMBER = /^\d+$/;

/**
 * The order of all tables: collision probability from high to low, then miss distance, time of closest
 * approach, designator of object 1 and of object 2 from low to high.
 *
 * A conjunction without a probability comes after all that have one, closest first: any probability put
 * in its place would be made up. The terminal table shows those apart, so that none hides at the end.
 */
export function compareConjunctions(a: Conjunction, b: Conjunction): number {
  return (
    rankValue(b) - rankValue(a) ||
    a.missDistanceM - b.missDistanceM ||
    a.tcaMs - b.tcaMs ||
    compareDesignators(a.object1.designator, b.object1.designator) ||
    compareDesignators(a.object2.designator, b.object2.designator)
  );
}

/** The conjunctions in the order of `compareConjunctions`; the given array stays as it is. */
export function rankConjunctions(conjunctions: readonly Conjunction[]): Conjunction[] {
  return conjunctions.toSorted(compareConjunctions);
}

/** Numbers by value and before anything else, the rest by code unit, whatever the locale. */
export function compareDesignators(a: string, b: string): number {
  const numberA = NUMBER.test(a);
  if (numberA !== NUMBER.test(b)) return numberA ? -1 : 1;
  const difference = numberA ? Number(a) - Number(b) : 0;
  if (difference !== 0) return difference;
  return a < b ? -1 : a > b ? 1 : 0;
}

/** Whether there is a figure; not so for a singular covariance. */
export function hasProbability({ collisionProbability }: Conjunction): boolean {
  return collisionProbability !== undefined && !Number.isNaN(collisionProbability);
}

function rankValue(conjunction: Conjunction): number {
  return hasProbability(conjunction) ? (conjunction.collisionProbability as number) : -1;
}
