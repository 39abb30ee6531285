import type { EncounterPlane } from './encounter-plane.js';
import { discProbability } from './foster.js';
import { maximumProbability } from './maximum.js';

/** How the two-dimensional probability changes with a common factor on all sigmas. */
export type Sensitivity = {
  readonly probabilityAtHalf: number;
  readonly probabilityAtOnce: number;
  readonly probabilityAtTwice: number;
  /** The factor at which the probability is largest; below 1 the figure is diluted. */
  readonly peakScale: number;
  readonly peakProbability: number;
};

/**
 * Probability at half, once and twice the combined sigmas, and where over all factors it peaks (see
 * `maximumProbability` for the limits with the miss inside the hard-body radius).
 *
 * @param plane as `encounterPlane` gives it
 */
export function sensitivityOf(plane: EncounterPlane, hardBodyRadiusM: number): Sensitivity {
  const at = (factor: number) =>
    discProbability(
      plane.sigmaXM * factor,
      plane.sigmaYM * factor,
      plane.missXM,
      plane.missYM,
      hardBodyRadiusM,
    );
  const peak = maximumProbability({ ...plane, hardBodyRadiusM });
  return {
    probabilityAtHalf: at(0.5),
    probabilityAtOnce: at(1),
    probabilityAtTwice: at(2),
    peakScale: peak.sigmaScale,
    peakProbability: peak.probability,
  };
}
