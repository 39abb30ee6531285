import { AGE_KNOTS_DAYS } from '../../uncertainty/calibrate-age-knots.js';
import { type AgeBin, objectBin } from './age-bins.js';
import { type ErrorGrowth, errorGrowth, isBiased, OBJECT_DEMAND } from './error-growth.js';
import { findManeuvers, type Maneuver, stretchesBetween } from './maneuvers.js';
import { type ObjectPairs, pairsOf } from './pairs.js';
import { type SetDifferences, setDifferences } from './set-differences.js';
import type { SetRecords } from './set-records.js';

/** Why an object has rows of its own or not. */
export type Standing = 'own rows' | 'too few pairs' | 'biased';

/** What the history of one object shows. */
export type ObjectResult = {
  readonly designator: number;
  readonly standing: Standing;
  readonly bins: ReadonlyArray<AgeBin | undefined>;
  /** Only with rows of its own. */
  readonly growth: ErrorGrowth | undefined;
};

/** The same with everything that is needed once and then forgotten. */
export type ObjectWork = {
  readonly result: ObjectResult;
  readonly differences: SetDifferences;
  readonly pairs: ObjectPairs;
  readonly maneuvers: readonly Maneuver[];
};

/** @param sets indices into `records`, by epoch */
export function workOnObject(records: SetRecords, designator: number, sets: readonly number[]): ObjectWork {
  const differences = setDifferences(records, sets);
  const maneuvers = findManeuvers(differences.epochMs, differences.jumpsM);
  const stretches = stretchesBetween(maneuvers, differences.epochMs.length);
  const pairs = pairsOf(designator, differences, stretches);
  const bins = AGE_KNOTS_DAYS.map((_, knot) => objectBin(differences, pairs.fitted[knot], knot));
  const growth = errorGrowth(bins, OBJECT_DEMAND);
  const standing =
    growth === undefined ? 'too few pairs' : isBiased(bins, growth.knots) ? 'biased' : 'own rows';
  return {
    result: { designator, standing, bins, growth: standing === 'own rows' ? growth : undefined },
    differences,
    pairs,
    maneuvers,
  };
}
