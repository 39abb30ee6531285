import type { Conjunction, ConjunctionObject } from '../../src/tables/conjunction.js';
import type { MessageRun } from '../../src/tables/conjunction-message.js';

const MS_PER_DAY = 86_400_000;
/** 2026-12-02T03:14:15.926Z and a fraction, as a search for the closest approach gives it. */
export const EXAMPLE_TCA_MS = Date.UTC(2026, 11, 2, 3, 14, 15, 926) + 0.25;

/** Object 1 of an invented encounter, changed as the test needs. */
export function exampleObject(changes: Partial<ConjunctionObject> = {}): ConjunctionObject {
  return {
    designator: '799990001',
    name: 'LARKSPUR 1',
    internationalDesignator: '2026-901A',
    maneuverable: 'YES',
    elementAgeDays: 1.5,
    elementEpochMs: EXAMPLE_TCA_MS - 1.5 * MS_PER_DAY,
    sigmaRtnM: [120.5, 900.25, 160.125],
    state: {
      positionKm: [2570.097065, 2244.654904, 6281.497978],
      velocityKmPerS: [4.418769571, 4.833547743, -3.526774282],
    },
    ...changes,
  };
}

/** An invented encounter, changed as the test needs. */
export function exampleConjunction(changes: Partial<Conjunction> = {}): Conjunction {
  return {
    tcaMs: EXAMPLE_TCA_MS,
    object1: exampleObject(),
    object2: exampleObject({
      designator: '799995002',
      name: 'THISTLE DEB',
      internationalDesignator: '',
      maneuverable: 'N/A',
      elementAgeDays: -0.25,
      elementEpochMs: EXAMPLE_TCA_MS + 0.25 * MS_PER_DAY,
      sigmaRtnM: [210, 2400, 330],
      state: {
        positionKm: [2569.5408, 2245.093614, 6281.599946],
        velocityKmPerS: [-2.8886125, -6.007247516, 3.328770172],
      },
    }),
    missDistanceM: 715.7481234,
    relativeSpeedMPerS: 14762.08543,
    relativePositionRtnM: [27.3641, -93.7459, 709.0543],
    relativeVelocityRtnMPerS: [-7.19512, -14693.1, -1426.25],
    collisionProbability: 1.234567e-5,
    collisionProbabilityMethod: 'FOSTER-1992',
    collisionProbabilityMax: 4.5e-5,
    collisionProbabilityFoster: 1.234567e-5,
    mahalanobisDistance: 1.23456,
    hardBodyRadiusM: 7.5,
    pairProbability: 2.5e-5,
    screenEntryMs: EXAMPLE_TCA_MS - 340,
    screenExitMs: EXAMPLE_TCA_MS + 340,
    remarks: [],
    ...changes,
  };
}

/** An invented run that the example could come from. */
export const MESSAGE_RUN: MessageRun = {
  originator: 'LARKSPUR OPERATIONS',
  creationMs: Date.UTC(2026, 11, 1, 6, 7, 8, 9),
  screenStartMs: Date.UTC(2026, 11, 1),
  screenStopMs: Date.UTC(2026, 11, 8),
  volume: { shape: 'BOX', halfSizeRtnKm: [0.4, 25, 26] },
};
