import type { ElementSet } from '../../src/elements/element-set.js';
import type { OrbitState } from '../../src/ephemeris/state.js';
import { norm, scale } from '../../src/vector.js';
import { FIRST_INVENTED_DESIGNATOR, walkerShell } from './catalog.js';
import { type ErrorLaw, withErrors } from './element-errors.js';
import { atEpoch, setThrough, stateAt } from './mean-elements.js';
import { seededRandom } from './random.js';
import { roundToTwoLine } from './two-line.js';

const MS_PER_DAY = 86_400_000;

export type SyntheticHistoryOptions = {
  readonly seed: number;
  readonly objects: number;
  readonly startMs: number;
  readonly days: number;
  readonly setsPerDay: number;
  readonly law: ErrorLaw;
  /** How many objects maneuver, each once, at a time in the middle third of the days. Default none. */
  readonly maneuvering?: number;
  readonly altitudeKm?: number;
  readonly inclinationDeg?: number;
  readonly firstDesignator?: number;
};

export type Maneuver = {
  readonly designator: string;
  readonly ms: number;
  /** Along the velocity, backward if negative. */
  readonly changeMPerS: number;
};

export type SyntheticHistory = {
  /** Object by object, each in the order of its epochs. */
  readonly sets: readonly ElementSet[];
  readonly maneuvers: readonly Maneuver[];
  /** Where the object of this index truly is, TEME. */
  readonly truthAt: (object: number, ms: number) => OrbitState;
};

/**
 * Element sets published over months for objects whose true motion is known: every set is the true orbit
 * with errors drawn afresh by `law`. Light drag and near-circular orbits keep SGP4's own
 * inconsistencies far below the errors.
 */
export function syntheticHistory(options: SyntheticHistoryOptions): SyntheticHistory {
  const random = seededRandom(options.seed);
  const { startMs, days, setsPerDay, law, objects, maneuvering = 0 } = options;
  const shell = walkerShell({
    count: objects,
    planes: objects,
    altitudeKm: options.altitudeKm ?? 780,
    inclinationDeg: options.inclinationDeg ?? 74,
    epochMs: startMs + (days / 2) * MS_PER_DAY,
    eccentricity: 0.001,
    bstar: 0.00001,
    firstDesignator: options.firstDesignator ?? FIRST_INVENTED_DESIGNATOR,
  });
  const maneuvers: Maneuver[] = [];
  const truths = shell.map((before, index) => {
    if (index >= maneuvering) return { before, after: before, fromMs: Number.POSITIVE_INFINITY };
    const ms = startMs + random.between(1 / 3, 2 / 3) * days * MS_PER_DAY;
    const changeMPerS = random.choice([-1, 1]) * random.between(0.1, 1);
    const { positionKm, velocityKmPerS } = knownState(before, ms);
    const faster = scale(velocityKmPerS, 1 + changeMPerS / 1000 / norm(velocityKmPerS));
    const after = setThrough({ positionKm, velocityKmPerS: faster }, ms, { ...before, epochMs: ms });
    maneuvers.push({ designator: before.designator, ms, changeMPerS });
    return { before, after, fromMs: ms };
  });
  const sets = truths.flatMap(({ before, after, fromMs }) => {
    const published: ElementSet[] = [];
    for (let index = 0; index < days * setsPerDay; index += 1) {
      const epochMs = startMs + ((index + random.between(0.1, 0.9)) / setsPerDay) * MS_PER_DAY;
      const exact = atEpoch(epochMs < fromMs ? before : after, epochMs);
      if (exact === undefined) throw new Error(`${before.designator} fails`);
      published.push(roundToTwoLine(withErrors(exact, law, random)));
    }
    return published;
  });
  return {
    sets,
    maneuvers,
    truthAt: (object, ms) => {
      const { before, after, fromMs } = truths[object];
      return knownState(ms < fromMs ? before : after, ms);
    },
  };
}

function knownState(set: ElementSet, ms: number): OrbitState {
  const state = stateAt(set, ms);
  if (state === undefined) throw new Error(`${set.designator} fails`);
  return state;
}
