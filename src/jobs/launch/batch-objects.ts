import { sgp4RecordOf } from '../../elements/sgp4-record.js';
import type { SigmaCurve } from '../../uncertainty/sigma-table.js';
import { type ObjectKnowledge, type ScreenedObject, screenedObject } from '../screened-object.js';
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
  return phases.map(({ set, designator, releaseMs, validFromMs, validToMs }) => ({
    ...screenedObject(set, knowledge, { fromMs: validFromMs, toMs: validToMs }),
    curve: knowledge.sigmas?.objects.get(designator) ?? injection,
    agesFromMs: releaseMs,
    isPredicted: true,
  }));
}

/**
 * An object of the batch when its launch slips: everything later by the slip, screened to the end of the
 * window of that launch.
 *
 * @param windowEndMs of the nominal launch
 */
export function slippedObject(object: ScreenedObject, slipMs: number, windowEndMs: number): ScreenedObject {
  const set = slipMs === 0 ? object.set : slippedSet(object.set, slipMs);
  return {
    ...object,
    set,
    record: slipMs === 0 ? object.record : sgp4RecordOf(set),
    validFromMs: object.validFromMs + slipMs,
    validToMs: Math.min(object.validToMs, windowEndMs) + slipMs,
    agesFromMs: object.agesFromMs + slipMs,
  };
}
