import type { ElementSet } from '../elements/element-set.js';
import { type OrbitSummary, orbitOf } from '../elements/orbit.js';
import { type PlacedRecord, recordNumber, sgp4RecordsOf } from '../ephemeris/sgp4-records.js';
import { type ListedObject, type Maneuverability, propertiesOf } from '../uncertainty/objects.js';
import { type SigmaCurve, type SigmaTable, sigmaCurveFor } from '../uncertainty/sigma-table.js';

/** One object of a screening: its elements, and what is known or assumed about it. */
export type ScreenedObject = PlacedRecord & {
  readonly set: ElementSet;
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

/**
 * Objects of element sets that SGP4 accepts, with no limit to when they stand. `loadSgp4` must have been awaited.
 */
export function screenedObjects(
  sets: readonly ElementSet[],
  { listed, sigmas, defaultSigmas }: ObjectKnowledge,
): ScreenedObject[] {
  const records = sgp4RecordsOf(sets);
  return sets.map((set, place) => {
    const orbit = orbitOf(set, { no: recordNumber({ records, place }, 'no_unkozai') });
    const properties = propertiesOf(listed, set.designator);
    return {
      set,
      records,
      place,
      orbit,
      designator: set.designator,
      name: properties.name ?? set.name,
      curve: sigmaCurveFor(sigmas, defaultSigmas, { designator: set.designator, ...orbit }),
      hardBodyRadiusM: properties.hardBodyRadiusM,
      isDefaultRadius: properties.isDefaultRadius,
      maneuverable: properties.maneuverable,
      validFromMs: Number.NEGATIVE_INFINITY,
      validToMs: Number.POSITIVE_INFINITY,
      agesFromMs: set.epochMs,
      isPredicted: false,
    };
  });
}
