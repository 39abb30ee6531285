import type { SatRec } from 'satellite.js';
import type { ElementSet } from '../elements/element-set.js';
import { type OrbitSummary, orbitOf } from '../elements/orbit.js';
import { sgp4RecordOf } from '../elements/sgp4-record.js';
import { type ListedObject, type Maneuverability, propertiesOf } from '../uncertainty/objects.js';
import { type SigmaCurve, type SigmaTable, sigmaCurveFor } from '../uncertainty/sigma-table.js';

/** One object of a screening: its elements, and what is known or assumed about it. */
export type ScreenedObject = {
  readonly set: ElementSet;
  readonly record: SatRec;
  readonly orbit: OrbitSummary;
  readonly designator: string;
  readonly name: string;
  readonly curve: SigmaCurve;
  readonly hardBodyRadiusM: number;
  readonly isDefaultRadius: boolean;
  readonly maneuverable: Maneuverability;
  /** When the elements stand for the object; infinite where nothing limits it. */
  readonly validFromMs: number;
  readonly validToMs: number;
  /** The age of the elements counts from here: their epoch, or the release of an object that is yet to fly. */
  readonly agesFromMs: number;
  /** The elements are a prediction of what is yet to fly, not public ones. */
  readonly isPredicted: boolean;
};

/** What the user told about objects; `undefined` where no file was given. */
export type ObjectKnowledge = {
  readonly listed: ReadonlyMap<string, ListedObject> | undefined;
  readonly sigmas: SigmaTable | undefined;
  /** Sigmas for what the user's table does not cover. */
  readonly defaultSigmas: SigmaTable;
};

type Validity = { readonly fromMs: number; readonly toMs: number };

const ALWAYS: Validity = { fromMs: Number.NEGATIVE_INFINITY, toMs: Number.POSITIVE_INFINITY };

/** @param set accepted by SGP4 */
export function screenedObject(
  set: ElementSet,
  { listed, sigmas, defaultSigmas }: ObjectKnowledge,
  validity: Validity = ALWAYS,
): ScreenedObject {
  const record = sgp4RecordOf(set);
  const orbit = orbitOf(set, record);
  const properties = propertiesOf(listed, set.designator);
  return {
    set,
    record,
    orbit,
    designator: set.designator,
    name: properties.name ?? set.name,
    curve: sigmaCurveFor(sigmas, defaultSigmas, { designator: set.designator, ...orbit }),
    hardBodyRadiusM: properties.hardBodyRadiusM,
    isDefaultRadius: properties.isDefaultRadius,
    maneuverable: properties.maneuverable,
    validFromMs: validity.fromMs,
    validToMs: validity.toMs,
    agesFromMs: set.epochMs,
    isPredicted: false,
  };
}
