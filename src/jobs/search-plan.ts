import type { MeanElements } from '../elements/sgp4-record.js';
import { type SearchObjects, type SearchRules, searchObjectsOf } from '../encounters/search-problem.js';
import { enclosingRadiusKm, type ScreeningVolume } from '../encounters/volume.js';
import type { SigmaCurve } from '../uncertainty/sigma-table.js';
import type { ScreenedObject } from './screened-object.js';

/** Everything a worker needs, in a form that passes between threads; bulk numbers are shared, not copied. */
export type SearchPlan = {
  /** `PLAN_FIELDS` doubles for each object, primaries first. */
  readonly elements: Float64Array;
  /** When the age of each object's elements counts from. */
  readonly agesFromMs: Float64Array;
  readonly hardBodyRadiusM: Float64Array;
  /** 1 where the radius is the default. */
  readonly hasDefaultRadius: Uint8Array;
  /** The distinct sigma curves, and which one each object has. */
  readonly curves: readonly SigmaCurve[];
  readonly curveOf: Int32Array;
  readonly primaryCount: number;
  readonly startMs: number;
  readonly endMs: number;
  readonly withinPrimaries: boolean;
  /** As `pairKey`. */
  readonly skippedPairs: readonly number[];
  readonly volume: ScreeningVolume;
  readonly maxAgeDays: number;
  /** The probability alone: no maximum over scaled sigmas, no sensitivity. Default: everything. */
  readonly onlyProbability?: boolean;
};

const PLAN_FIELDS = 10;

/** @param objects primaries first */
export function searchPlanOf(
  objects: readonly ScreenedObject[],
  settings: Omit<
    SearchPlan,
    'elements' | 'agesFromMs' | 'hardBodyRadiusM' | 'hasDefaultRadius' | 'curves' | 'curveOf'
  >,
): SearchPlan {
  const elements = sharedFloat64(PLAN_FIELDS * objects.length);
  const agesFromMs = sharedFloat64(objects.length);
  const hardBodyRadiusM = sharedFloat64(objects.length);
  const hasDefaultRadius = new Uint8Array(new SharedArrayBuffer(objects.length));
  const curveOf = new Int32Array(new SharedArrayBuffer(4 * objects.length));
  const curves: SigmaCurve[] = [];
  const numberOf = new Map<SigmaCurve, number>();
  objects.forEach(({ set, curve, ...object }, i) => {
    elements.set(
      [
        set.epochMs,
        set.meanMotionRevPerDay,
        set.eccentricity,
        set.inclinationDeg,
        set.rightAscensionDeg,
        set.argumentOfPerigeeDeg,
        set.meanAnomalyDeg,
        set.bstar,
        object.validFromMs,
        object.validToMs,
      ],
      PLAN_FIELDS * i,
    );
    agesFromMs[i] = object.agesFromMs;
    hardBodyRadiusM[i] = object.hardBodyRadiusM;
    hasDefaultRadius[i] = object.isDefaultRadius ? 1 : 0;
    let number = numberOf.get(curve);
    if (number === undefined) {
      number = curves.push(curve) - 1;
      numberOf.set(curve, number);
    }
    curveOf[i] = number;
  });
  return { ...settings, elements, agesFromMs, hardBodyRadiusM, hasDefaultRadius, curves, curveOf };
}

/** SGP4 records and all from the bare numbers, on the side of the worker. */
export function objectsOfPlan({ elements, primaryCount }: SearchPlan): SearchObjects {
  const sets: (MeanElements & { validFromMs: number; validToMs: number })[] = [];
  for (let at = 0; at < elements.length; at += PLAN_FIELDS) {
    sets.push({
      epochMs: elements[at],
      meanMotionRevPerDay: elements[at + 1],
      eccentricity: elements[at + 2],
      inclinationDeg: elements[at + 3],
      rightAscensionDeg: elements[at + 4],
      argumentOfPerigeeDeg: elements[at + 5],
      meanAnomalyDeg: elements[at + 6],
      bstar: elements[at + 7],
      validFromMs: elements[at + 8],
      validToMs: elements[at + 9],
    });
  }
  return searchObjectsOf(sets, primaryCount);
}

export function rulesOfPlan(plan: SearchPlan): SearchRules {
  return {
    startMs: plan.startMs,
    endMs: plan.endMs,
    missKm: enclosingRadiusKm(plan.volume),
    withinPrimaries: plan.withinPrimaries,
    skippedPairs: new Set(plan.skippedPairs),
  };
}

function sharedFloat64(length: number): Float64Array {
  return new Float64Array(new SharedArrayBuffer(8 * length));
}
