import type { ElementSet } from '../../../src/elements/element-set.js';
import type { BatchSet } from '../../../src/jobs/launch/read-batch.js';

export const RELEASE_MS = Date.UTC(2026, 11, 5, 15, 22, 30);

/** A set in low orbit, as it comes out of a batch file. */
export function batchSet(designator: string, changes: Partial<ElementSet> = {}, line = 1): BatchSet {
  return {
    numberInFile: '',
    set: {
      designator,
      name: designator.slice(2),
      internationalDesignator: '',
      epochMs: RELEASE_MS,
      meanMotionRevPerDay: 15.8,
      eccentricity: 0.0003,
      inclinationDeg: 53.4,
      rightAscensionDeg: 203.5,
      argumentOfPerigeeDeg: 146,
      meanAnomalyDeg: 254,
      bstar: 0.0002,
      source: { file: 'batch.tle', line, text: '' },
      ...changes,
    },
  };
}
