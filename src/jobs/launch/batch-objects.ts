import { sgp4RecordsOf } from '../../ephemeris/sgp4-records.js';
import type { SigmaCurve } from '../../uncertainty/sigma-table.js';
import { type ObjectKnowledge, type ScreenedObject, screenedObjects } from '../screened-object.js';
import type { BatchPhase } from './phases.js';
import { slippedSet } from './slip.js';

/**
 * The phases of the batch as a screening takes them. Ages count from release, and the position errors are
 * those of the injection unless the user's sigma table has rows for the very object: classes of orbits tell
 * of elements fitted to observations.
 *
 * @param injection errors of an object without rows of its own
 */
export function batchObjects(
  phases: readonly BatchPhase[],
  knowledge: ObjectKnowledge,
  injection: SigmaCurve,
): ScreenedObject[] {
  const objects = screenedObjects(
    phases.map(({ set }) => set),
    knowledge,
  );
  return phases.map(({ designator, releaseMs, validFromMs, validToMs }, k) => ({
    ...objects[k],
    validFromMs,
    validToMs,
    curve: knowledge.sigmas?.objects.get(designator) ?? injection,
    agesFromMs: releaseMs,
    isPredicted: true,
  }));
}

/**
 * The objects of the batch when its launch slips: everything later by the slip, screened to the end of the
 * window of that launch.
 *
 * @param windowEndMs of the nominal launch
 */
export function slippedObjects(
  batch: readonly ScreenedObject[],
  slipMs: number,
  windowEndMs: number,
): ScreenedObject[] {
  const sets = batch.map(({ set }) => (slipMs === 0 ? set : slippedSet(set, slipMs)));
  const records = sgp4RecordsOf(sets);
  return batch.map((object, place) => ({
    ...object,
    set: sets[place],
    records,
    place,
    validFromMs: object.validFromMs + slipMs,
    validToMs: Math.min(object.validToMs, windowEndMs) + slipMs,
    agesFromMs: object.agesFromMs + slipMs,
  }));
}
