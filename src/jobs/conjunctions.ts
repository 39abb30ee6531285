import { rtnFrame } from '../ephemeris/rtn-frame.js';
import type { OrbitState } from '../ephemeris/state.js';
import type { Conjunction, ConjunctionObject } from '../tables/conjunction.js';
import type { ConjunctionSensitivity } from '../tables/sensitivity-csv.js';
import { sigmaAt } from '../uncertainty/sigma-table.js';
import { norm, rotate, scale, subtract } from '../vector.js';
import { type EncounterRecords, FIELD, FIELDS, PROBABILITY_METHODS } from './encounter-records.js';
import { remarksOfBits } from './remark-bits.js';
import type { ShownObject } from './screened-object.js';

const MS_PER_DAY = 86_400_000;

/** One record as the tables and messages show it. */
export function conjunctionOf(
  records: EncounterRecords,
  number: number,
  objects: readonly ShownObject[],
): Conjunction {
  const { data } = records;
  const at = FIELDS * number;
  const figure = (field: number) => {
    const value = data[at + field];
    return Number.isNaN(value) ? undefined : value;
  };
  const tcaMs = data[at + FIELD.tcaMs];
  const first = objects[data[at + FIELD.first]];
  const second = objects[data[at + FIELD.second]];
  const state1 = stateFrom(data, at + FIELD.state1);
  const state2 = stateFrom(data, at + FIELD.state2);
  const frame = rtnFrame(state1.positionKm, state1.velocityKmPerS);
  const positionM = scale(subtract(state2.positionKm, state1.positionKm), 1000);
  const velocityMPerS = scale(subtract(state2.velocityKmPerS, state1.velocityKmPerS), 1000);
  return {
    tcaMs,
    object1: conjunctionObject(first, state1, tcaMs),
    object2: conjunctionObject(second, state2, tcaMs),
    missDistanceM: 1000 * data[at + FIELD.missKm],
    relativeSpeedMPerS: norm(velocityMPerS),
    relativePositionRtnM: rotate(frame, positionM),
    relativeVelocityRtnMPerS: rotate(frame, velocityMPerS),
    collisionProbability: figure(FIELD.probability),
    collisionProbabilityMethod: PROBABILITY_METHODS[data[at + FIELD.method]],
    collisionProbabilityMax: figure(FIELD.probabilityMax),
    collisionProbabilityFoster: figure(FIELD.probabilityFoster),
    mahalanobisDistance: figure(FIELD.mahalanobis),
    hardBodyRadiusM: first.hardBodyRadiusM + second.hardBodyRadiusM,
    pairProbability: figure(FIELD.pairProbability),
    screenEntryMs: figure(FIELD.entryMs),
    screenExitMs: figure(FIELD.exitMs),
    remarks: remarksOfBits(data[at + FIELD.remarks]),
  };
}

/** How the probability of one record changes with the sigmas. */
export function sensitivityOf(
  records: EncounterRecords,
  number: number,
  rank: number,
  objects: readonly ShownObject[],
): ConjunctionSensitivity {
  const { data } = records;
  const at = FIELDS * number;
  const figure = (field: number) => {
    const value = data[at + field];
    return Number.isNaN(value) ? undefined : value;
  };
  return {
    rank,
    tcaMs: data[at + FIELD.tcaMs],
    object1: objects[data[at + FIELD.first]],
    object2: objects[data[at + FIELD.second]],
    probabilityAtHalf: figure(FIELD.probabilityAtHalf),
    probabilityAtOnce: figure(FIELD.probabilityFoster),
    probabilityAtTwice: figure(FIELD.probabilityAtTwice),
    peakScale: figure(FIELD.peakScale),
    peakProbability: figure(FIELD.probabilityMax),
  };
}

function conjunctionObject(object: ShownObject, state: OrbitState, tcaMs: number): ConjunctionObject {
  const elementAgeDays = (tcaMs - object.agesFromMs) / MS_PER_DAY;
  return {
    designator: object.designator,
    name: object.name,
    internationalDesignator: object.set.internationalDesignator,
    maneuverable: object.maneuverable,
    elementAgeDays,
    elementEpochMs: object.set.epochMs,
    isPredicted: object.isPredicted,
    sigmaRtnM: sigmaAt(object.curve, elementAgeDays),
    state,
  };
}

function stateFrom(data: Float64Array, at: number): OrbitState {
  return {
    positionKm: [data[at], data[at + 1], data[at + 2]],
    velocityKmPerS: [data[at + 3], data[at + 4], data[at + 5]],
  };
}
