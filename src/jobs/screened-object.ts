import type { ElementSet } from '../elements/element-set.js';
import { type OrbitSummary, orbitOf } from '../elements/orbit.js';
import { type MeanElements, sgp4RecordOf } from '../elements/sgp4-record.js';
import {
  createSgp4Records,
  laySgp4Record,
  type PlacedRecord,
  type Sgp4Records,
} from '../ephemeris/sgp4-records.js';
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
  const records = createSgp4Records(sets.length, originOf(sets));
  return sets.map((set, place) => {
    // The record in JavaScript is gone again before the next: kept, they would be most of what memory holds.
    const record = sgp4RecordOf(set);
    laySgp4Record(records, place, record, set.epochMs);
    const orbit = orbitOf(set, record);
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

/** SGP4 records of element sets alone. */
export function sgp4RecordsOf(sets: readonly MeanElements[]): Sgp4Records {
  const records = createSgp4Records(sets.length, originOf(sets));
  sets.forEach((set, place) => {
    laySgp4Record(records, place, sgp4RecordOf(set), set.epochMs);
  });
  return records;
}

function originOf(sets: readonly MeanElements[]): number {
  return sets[0]?.epochMs ?? 0;
}
