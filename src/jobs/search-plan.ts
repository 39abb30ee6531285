import type { SatRec } from 'satellite.js';
import { EARTH_RADIUS_KM } from '../elements/orbit.js';
import { type MeanElements, sgp4RecordOf } from '../elements/sgp4-record.js';
import type { SearchObjects, SearchRules } from '../encounters/search-problem.js';
import { enclosingRadiusKm, type ScreeningVolume } from '../encounters/volume.js';
import { laySecularTerms, TERMS_SIZE } from '../ephemeris/secular-elements.js';
import { laySgp4Records, type Sgp4Records } from '../ephemeris/sgp4-records.js';
import type { SigmaCurve } from '../uncertainty/sigma-table.js';
import type { ScreenedObject } from './screened-object.js';

/** Everything a worker needs, in a form that passes between threads; bulk numbers are shared, not copied. */
export type SearchPlan = {
  /** `PLAN_FIELDS` doubles for each object, primaries first. */
  readonly elements: Float64Array;
  /** As in `SearchObjects`, as are the secular terms. */
  readonly records: Sgp4Records;
  readonly secularTerms: Float64Array;
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

const PLAN_FIELDS = 11;

/**
 * `loadSgp4` must have been awaited.
 *
 * @param objects primaries first
 */
export function searchPlanOf(
  objects: readonly ScreenedObject[],
  settings: Omit<
    SearchPlan,
    | 'elements'
    | 'records'
    | 'secularTerms'
    | 'agesFromMs'
    | 'hardBodyRadiusM'
    | 'hasDefaultRadius'
    | 'curves'
    | 'curveOf'
  >,
): SearchPlan {
  const elements = sharedFloat64(PLAN_FIELDS * objects.length);
  const secularTerms = sharedFloat64(TERMS_SIZE * objects.length);
  const agesFromMs = sharedFloat64(objects.length);
  const hardBodyRadiusM = sharedFloat64(objects.length);
  const hasDefaultRadius = new Uint8Array(new SharedArrayBuffer(objects.length));
  const curveOf = new Int32Array(new SharedArrayBuffer(4 * objects.length));
  const curves: SigmaCurve[] = [];
  const numberOf = new Map<SigmaCurve, number>();
  objects.forEach(({ set, record, curve, ...object }, i) => {
    laySecularTerms(record, secularTerms, TERMS_SIZE * i);
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
        object.orbit.perigeeHeightKm + EARTH_RADIUS_KM,
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
  return {
    ...settings,
    elements,
    records: laySgp4Records(
      objects.map(({ record }) => record),
      objects.map(({ set }) => set.epochMs),
      settings.startMs,
    ),
    secularTerms,
    agesFromMs,
    hardBodyRadiusM,
    hasDefaultRadius,
    curves,
    curveOf,
  };
}

/** What is searched, from the bare numbers of a plan: SGP4 records of JavaScript are made as they are asked for. */
export function objectsOfPlan({
  elements,
  records: sgp4,
  secularTerms,
  primaryCount,
}: SearchPlan): SearchObjects {
  const count = elements.length / PLAN_FIELDS;
  const field = (place: number) =>
    Float64Array.from({ length: count }, (_, object) => elements[PLAN_FIELDS * object + place]);
  const records: (SatRec | undefined)[] = new Array(count).fill(undefined);
  const recordOf = (object: number): SatRec => {
    let record = records[object];
    if (record === undefined) {
      record = sgp4RecordOf(meanElementsAt(elements, PLAN_FIELDS * object));
      records[object] = record;
    }
    return record;
  };
  return {
    count,
    primaryCount,
    records: sgp4,
    recordOf,
    secularTerms,
    epochMs: field(0),
    eccentricity: field(2),
    validFromMs: field(8),
    validToMs: field(9),
    perigeeRadiusKm: field(10),
  };
}

function meanElementsAt(elements: Float64Array, at: number): MeanElements {
  return {
    epochMs: elements[at],
    meanMotionRevPerDay: elements[at + 1],
    eccentricity: elements[at + 2],
    inclinationDeg: elements[at + 3],
    rightAscensionDeg: elements[at + 4],
    argumentOfPerigeeDeg: elements[at + 5],
    meanAnomalyDeg: elements[at + 6],
    bstar: elements[at + 7],
  };
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
