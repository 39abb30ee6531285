import { EARTH_RADIUS_KM } from '../elements/orbit.js';
import type { SearchObjects, SearchRules } from '../encounters/search-problem.js';
import { enclosingRadiusKm, type ScreeningVolume } from '../encounters/volume.js';
import { laySecularTerms, TERMS_SIZE } from '../ephemeris/secular-elements.js';
import { gatherRecords } from '../ephemeris/sgp4-records.js';
import type { SigmaCurve } from '../uncertainty/sigma-table.js';
import type { ScreenedObject } from './screened-object.js';

/** Everything a worker needs, in a form that passes between threads; bulk numbers are shared, not copied. */
export type SearchPlan = {
  readonly objects: SearchObjects;
  /** When the age of each object's elements counts from. */
  readonly agesFromMs: Float64Array;
  readonly hardBodyRadiusM: Float64Array;
  /** 1 where the radius is the default. */
  readonly hasDefaultRadius: Uint8Array;
  /** The distinct sigma curves, and which one each object has. */
  readonly curves: readonly SigmaCurve[];
  readonly curveOf: Int32Array;
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

/** What a plan does not take from its objects. */
export type PlanSettings = Pick<
  SearchPlan,
  'startMs' | 'endMs' | 'withinPrimaries' | 'skippedPairs' | 'volume' | 'maxAgeDays' | 'onlyProbability'
>;

/** @param objects primaries first */
export function searchPlanOf(
  objects: readonly ScreenedObject[],
  primaryCount: number,
  settings: PlanSettings,
): SearchPlan {
  const hasDefaultRadius = new Uint8Array(new SharedArrayBuffer(objects.length));
  const curveOf = new Int32Array(new SharedArrayBuffer(4 * objects.length));
  const numberOf = new Map<SigmaCurve, number>();
  objects.forEach(({ curve, isDefaultRadius }, i) => {
    hasDefaultRadius[i] = isDefaultRadius ? 1 : 0;
    const number = numberOf.get(curve) ?? numberOf.size;
    numberOf.set(curve, number);
    curveOf[i] = number;
  });
  return {
    ...settings,
    objects: searchObjectsOf(objects, primaryCount, settings.startMs),
    agesFromMs: shared(objects, ({ agesFromMs }) => agesFromMs),
    hardBodyRadiusM: shared(objects, ({ hardBodyRadiusM }) => hardBodyRadiusM),
    hasDefaultRadius,
    curves: [...numberOf.keys()],
    curveOf,
  };
}

/** What a search takes of an object. */
export type SearchedObject = Pick<
  ScreenedObject,
  'records' | 'place' | 'validFromMs' | 'validToMs' | 'orbit'
> & { readonly set: Pick<ScreenedObject['set'], 'epochMs' | 'eccentricity'> };

/**
 * @param objects primaries first
 * @param originMs what times count from, near the window
 */
export function searchObjectsOf(
  objects: readonly SearchedObject[],
  primaryCount: number,
  originMs: number,
): SearchObjects {
  const epochMs = shared(objects, ({ set }) => set.epochMs);
  const records = gatherRecords(objects, epochMs, originMs);
  const secularTerms = sharedFloat64(TERMS_SIZE * objects.length);
  for (let i = 0; i < objects.length; i++) laySecularTerms(records, i, secularTerms, TERMS_SIZE * i);
  return {
    count: objects.length,
    primaryCount,
    records,
    secularTerms,
    epochMs,
    eccentricity: shared(objects, ({ set }) => set.eccentricity),
    perigeeRadiusKm: shared(objects, ({ orbit }) => orbit.perigeeHeightKm + EARTH_RADIUS_KM),
    validFromMs: shared(objects, ({ validFromMs }) => validFromMs),
    validToMs: shared(objects, ({ validToMs }) => validToMs),
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

function shared<Item>(objects: readonly Item[], figureOf: (object: Item) => number): Float64Array {
  const figures = sharedFloat64(objects.length);
  objects.forEach((object, i) => {
    figures[i] = figureOf(object);
  });
  return figures;
}

function sharedFloat64(length: number): Float64Array {
  return new Float64Array(new SharedArrayBuffer(8 * length));
}
