import type { ClosestApproach } from '../encounters/closest-approach.js';
import { passageThrough } from '../encounters/volume.js';
import { recordStateAt } from '../ephemeris/record-states.js';
import type { PlacedRecord } from '../ephemeris/sgp4-records.js';
import { assessInFull } from '../probability/assess-encounter.js';
import { discProbability } from '../probability/foster.js';
import { remarkBitsOf } from '../probability/remarks.js';
import { covarianceRtnM2, isBeyond, sigmaAt } from '../uncertainty/sigma-table.js';
import type { Matrix3 } from '../vector.js';
import { type EncounterRecords, extendRecords, FIELD, PROBABILITY_METHODS } from './encounter-records.js';
import { type PathSide, pathProbability } from './path-probability.js';
import type { SearchPlan } from './search-plan.js';

const MS_PER_DAY = 86_400_000;

const states = new Float64Array(12);

/**
 * Assesses closest approaches: screening volume, uncertainty, probability. Those that do not enter the
 * volume are left out.
 *
 * @param records takes one record for each encounter, in the order of the approaches
 */
export function assessApproaches(
  approaches: readonly ClosestApproach[],
  plan: SearchPlan,
  records: EncounterRecords,
): void {
  for (const approach of approaches) assessApproach(approach, plan, records);
}

function assessApproach(
  { first, second, tcaMs }: ClosestApproach,
  plan: SearchPlan,
  records: EncounterRecords,
): void {
  const { objects } = plan;
  const { records: sgp4 } = objects;
  const object1 = { records: sgp4, place: first };
  const object2 = { records: sgp4, place: second };
  recordStateAt(sgp4, first, tcaMs, states, 0);
  recordStateAt(sgp4, second, tcaMs, states, 6);
  const missKm = Math.hypot(states[6] - states[0], states[7] - states[1], states[8] - states[2]);
  const speedKmPerS = Math.hypot(states[9] - states[3], states[10] - states[4], states[11] - states[5]);
  const fromMs = Math.max(plan.startMs, objects.validFromMs[first], objects.validFromMs[second]);
  const toMs = Math.min(plan.endMs, objects.validToMs[first], objects.validToMs[second]);
  let entryMs = Number.NaN;
  let exitMs = Number.NaN;
  if (plan.volume.shape !== 'SPHERE') {
    const passage = passageThrough(object1, object2, tcaMs, speedKmPerS, plan.volume, fromMs, toMs);
    if (passage === undefined) return;
    ({ entryMs, exitMs } = passage);
  }
  const age1 = (tcaMs - plan.agesFromMs[first]) / MS_PER_DAY;
  const age2 = (tcaMs - plan.agesFromMs[second]) / MS_PER_DAY;
  const curve1 = plan.curves[plan.curveOf[first]];
  const curve2 = plan.curves[plan.curveOf[second]];
  const sigma1 = sigmaAt(curve1, age1);
  const sigma2 = sigmaAt(curve2, age2);
  const hardBodyRadiusM = plan.hardBodyRadiusM[first] + plan.hardBodyRadiusM[second];
  const side1 = sideFrom(0, object1, covarianceRtnM2(sigma1));
  const side2 = sideFrom(6, object2, covarianceRtnM2(sigma2));
  const assessed = assessInFull(
    { object1: side1, object2: side2, hardBodyRadiusM },
    plan.onlyProbability !== true,
  );
  const path = pathProbability(side1, side2, tcaMs, hardBodyRadiusM, assessed, fromMs, toMs);
  const { plane } = assessed;
  const scaled = (factor: number) =>
    plane === undefined || plan.onlyProbability === true
      ? Number.NaN
      : discProbability(
          plane.sigmaXM * factor,
          plane.sigmaYM * factor,
          plane.missXM,
          plane.missYM,
          hardBodyRadiusM,
        );
  const at = extendRecords(records, 1);
  const { data } = records;
  data[at + FIELD.first] = first;
  data[at + FIELD.second] = second;
  data[at + FIELD.tcaMs] = tcaMs;
  data.set(states, at + FIELD.state1);
  data[at + FIELD.missKm] = missKm;
  data[at + FIELD.probability] = path.probability ?? Number.NaN;
  data[at + FIELD.probabilityFoster] = assessed.collisionProbability ?? Number.NaN;
  data[at + FIELD.probabilityMax] = assessed.collisionProbabilityMax ?? Number.NaN;
  data[at + FIELD.mahalanobis] = assessed.mahalanobisDistance ?? Number.NaN;
  data[at + FIELD.peakScale] = assessed.peakSigmaScale ?? Number.NaN;
  data[at + FIELD.probabilityAtHalf] = scaled(0.5);
  data[at + FIELD.probabilityAtTwice] = scaled(2);
  data[at + FIELD.method] = PROBABILITY_METHODS.indexOf(path.method);
  data[at + FIELD.entryMs] = entryMs;
  data[at + FIELD.exitMs] = exitMs;
  data[at + FIELD.remarks] = remarkBitsOf({
    relativeSpeedMPerS: 1000 * speedKmPerS,
    missDistanceM: 1000 * missKm,
    hardBodyRadiusM,
    hasProbability: plane !== undefined,
    isStraight: path.isStraight,
    peakSigmaScale: assessed.peakSigmaScale,
    elementAgeDays: [age1, age2],
    maxAgeDays: plan.maxAgeDays,
    hasDefaultSigma: [curve1.isDefault, curve2.isDefault],
    isBeyondSigmaTable: [isBeyond(curve1, age1), isBeyond(curve2, age2)],
    hasDefaultRadius: [plan.hasDefaultRadius[first] === 1, plan.hasDefaultRadius[second] === 1],
  });
}

/** One object at closest approach, where its state has been worked out. */
function sideFrom(offset: number, { records, place }: PlacedRecord, covarianceRtnM2: Matrix3): PathSide {
  return {
    records,
    place,
    positionKm: [states[offset], states[offset + 1], states[offset + 2]],
    velocityKmPerS: [states[offset + 3], states[offset + 4], states[offset + 5]],
    covarianceRtnM2,
  };
}
