import { rtnFrame } from '../ephemeris/rtn-frame.js';
import type { OrbitState } from '../ephemeris/state.js';
import type { Conjunction, ConjunctionObject } from '../tables/conjunction.js';
import { compareDesignators } from '../tables/rank-conjunctions.js';
import type { ConjunctionSensitivity } from '../tables/sensitivity-csv.js';
import { sigmaAt } from '../uncertainty/sigma-table.js';
import { norm, rotate, scale, subtract } from '../vector.js';
import { type EncounterRecords, FIELD, FIELDS, PROBABILITY_METHODS } from './encounter-records.js';
import { remarksOfBits } from './remark-bits.js';
import type { ScreenedObject } from './screened-object.js';

const MS_PER_DAY = 86_400_000;

/**
 * Puts the total of each pair over its encounters in the window into every one of its records, as `pairTotal`
 * does: at least one collision, encounters taken as independent, those without a figure as none.
 *
 * @param identities which object each index stands for, where several stand for one in turn
 */
export function fillPairProbabilities(
  records: EncounterRecords,
  objectCount: number,
  identities?: ArrayLike<number>,
): void {
  const { data, size } = records;
  const totals = new Map<number, number>();
  const identity = (index: number) => identities?.[index] ?? index;
  const keyAt = (at: number) =>
    identity(data[at + FIELD.first]) * objectCount + identity(data[at + FIELD.second]);
  for (let at = 0; at < FIELDS * size; at += FIELDS) {
    const probability = data[at + FIELD.probability];
    if (Number.isNaN(probability)) continue;
    const before = totals.get(keyAt(at)) ?? 0;
    totals.set(keyAt(at), before + probability * (1 - before));
  }
  for (let at = 0; at < FIELDS * size; at += FIELDS) {
    data[at + FIELD.pairProbability] = totals.get(keyAt(at)) ?? Number.NaN;
  }
}

/**
 * The order of `compareConjunctions`, worked out on the records.
 *
 * @returns record numbers from the first rank to the last
 */
export function rankRecords(records: EncounterRecords, objects: readonly ScreenedObject[]): Uint32Array {
  const { data, size } = records;
  const order = Uint32Array.from({ length: size }, (_, i) => i);
  const probability = Float64Array.from(order, (i) => {
    const value = data[FIELDS * i + FIELD.probability];
    return Number.isNaN(value) ? -1 : value;
  });
  return order.sort((a, b) => {
    const i = FIELDS * a;
    const j = FIELDS * b;
    return (
      probability[b] - probability[a] ||
      data[i + FIELD.missKm] - data[j + FIELD.missKm] ||
      data[i + FIELD.tcaMs] - data[j + FIELD.tcaMs] ||
      compareDesignators(
        objects[data[i + FIELD.first]].designator,
        objects[data[j + FIELD.first]].designator,
      ) ||
      compareDesignators(
        objects[data[i + FIELD.second]].designator,
        objects[data[j + FIELD.second]].designator,
      )
    );
  });
}

/** One record as the tables and messages show it. */
export function conjunctionOf(
  records: EncounterRecords,
  number: number,
  objects: readonly ScreenedObject[],
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
  objects: readonly ScreenedObject[],
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
    object1Designator: objects[data[at + FIELD.first]].designator,
    object2Designator: objects[data[at + FIELD.second]].designator,
    probabilityAtHalf: figure(FIELD.probabilityAtHalf),
    probabilityAtOnce: figure(FIELD.probabilityFoster),
    probabilityAtTwice: figure(FIELD.probabilityAtTwice),
    peakScale: figure(FIELD.peakScale),
    peakProbability: figure(FIELD.probabilityMax),
  };
}

function conjunctionObject(object: ScreenedObject, state: OrbitState, tcaMs: number): ConjunctionObject {
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
