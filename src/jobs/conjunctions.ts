import { rtnFrame } from '../ephemeris/rtn-frame.js';
import type { OrbitState } from '../ephemeris/state.js';
import type { Conjunction, ConjunctionObject } from '../tables/conjunction.js';
import type { ConjunctionRow, ConjunctionRowObject } from '../tables/conjunctions-csv.js';
import type { ConjunctionSensitivity } from '../tables/sensitivity-csv.js';
import { sigmaAt } from '../uncertainty/sigma-table.js';
import { norm, rotate, scale, subtract } from '../vector.js';
import { type EncounterRecords, FIELD, FIELDS, PROBABILITY_METHODS } from './encounter-records.js';
import { remarksOfBits } from './remark-bits.js';
import type { ScreenedObject } from './screened-object.js';

/** The part of an object that rows show. */
export type RowObject = Pick<
  ScreenedObject,
  'designator' | 'name' | 'curve' | 'hardBodyRadiusM' | 'agesFromMs'
>;

const MS_PER_DAY = 86_400_000;

/** One record as the terminal table and messages show it. */
export function conjunctionOf(
  records: EncounterRecords,
  number: number,
  objects: readonly ScreenedObject[],
): Conjunction {
  const { data } = records;
  const at = FIELDS * number;
  const row = conjunctionRowOf(records, number, objects);
  const side = (
    shown: ConjunctionRowObject,
    { set, maneuverable, isPredicted }: ScreenedObject,
    state: OrbitState,
  ): ConjunctionObject => ({
    ...shown,
    internationalDesignator: set.internationalDesignator,
    maneuverable,
    elementEpochMs: set.epochMs,
    isPredicted,
    state,
  });
  return {
    ...row,
    object1: side(row.object1, objects[data[at + FIELD.first]], stateFrom(data, at + FIELD.state1)),
    object2: side(row.object2, objects[data[at + FIELD.second]], stateFrom(data, at + FIELD.state2)),
  };
}

/** One record as its row shows it. */
export function conjunctionRowOf(
  records: EncounterRecords,
  number: number,
  objects: readonly RowObject[],
): ConjunctionRow {
  const { data } = records;
  const at = FIELDS * number;
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
    object1: rowObject(first, tcaMs),
    object2: rowObject(second, tcaMs),
    missDistanceM: 1000 * data[at + FIELD.missKm],
    relativeSpeedMPerS: norm(velocityMPerS),
    relativePositionRtnM: rotate(frame, positionM),
    relativeVelocityRtnMPerS: rotate(frame, velocityMPerS),
    collisionProbability: figure(data, at + FIELD.probability),
    collisionProbabilityMethod: PROBABILITY_METHODS[data[at + FIELD.method]],
    collisionProbabilityMax: figure(data, at + FIELD.probabilityMax),
    collisionProbabilityFoster: figure(data, at + FIELD.probabilityFoster),
    mahalanobisDistance: figure(data, at + FIELD.mahalanobis),
    hardBodyRadiusM: first.hardBodyRadiusM + second.hardBodyRadiusM,
    pairProbability: figure(data, at + FIELD.pairProbability),
    screenEntryMs: figure(data, at + FIELD.entryMs),
    screenExitMs: figure(data, at + FIELD.exitMs),
    remarks: remarksOfBits(data[at + FIELD.remarks]),
  };
}

/** How the probability of one record changes with the sigmas. */
export function sensitivityOf(
  { data }: EncounterRecords,
  number: number,
  rank: number,
  objects: readonly { readonly designator: string }[],
): ConjunctionSensitivity {
  const at = FIELDS * number;
  return {
    rank,
    tcaMs: data[at + FIELD.tcaMs],
    object1: objects[data[at + FIELD.first]],
    object2: objects[data[at + FIELD.second]],
    probabilityAtHalf: figure(data, at + FIELD.probabilityAtHalf),
    probabilityAtOnce: figure(data, at + FIELD.probabilityFoster),
    probabilityAtTwice: figure(data, at + FIELD.probabilityAtTwice),
    peakScale: figure(data, at + FIELD.peakScale),
    peakProbability: figure(data, at + FIELD.probabilityMax),
  };
}

function rowObject({ designator, name, curve, agesFromMs }: RowObject, tcaMs: number): ConjunctionRowObject {
  const elementAgeDays = (tcaMs - agesFromMs) / MS_PER_DAY;
  return { designator, name, elementAgeDays, sigmaRtnM: sigmaAt(curve, elementAgeDays) };
}

function figure(data: Float64Array, place: number): number | undefined {
  const value = data[place];
  return Number.isNaN(value) ? undefined : value;
}

function stateFrom(data: Float64Array, at: number): OrbitState {
  return {
    positionKm: [data[at], data[at + 1], data[at + 2]],
    velocityKmPerS: [data[at + 3], data[at + 4], data[at + 5]],
  };
}
