import { DESIGNATOR_IN_WORDS, parseDesignator } from '../elements/batch-designator.js';
import { InputError } from '../input-error.js';
import { numberCell, readCsv } from './read-csv.js';

/** CCSDS 508 values of MANEUVERABLE. */
export type Maneuverability = 'YES' | 'NO' | 'N/A';

/** What a row of the objects file says; `undefined` where its cell is empty. */
export type ListedObject = {
  /** Line in the file, so that a row that fits no object can be pointed at. */
  readonly line: number;
  readonly name: string | undefined;
  readonly hardBodyRadiusM: number | undefined;
  readonly maneuverable: Maneuverability | undefined;
};

export type ObjectProperties = {
  /** `undefined`: the name in the element set stands. */
  readonly name: string | undefined;
  readonly hardBodyRadiusM: number;
  readonly maneuverable: Maneuverability;
  /** The radius is the default, not one that the user gave. */
  readonly isDefaultRadius: boolean;
};

/**
 * Hard-body radius of an object that no file tells about, meters. Own assumption in the range of common
 * practice: a sphere of 5 m encloses most satellites with their panels out and half a rocket stage, and is
 * far too large for most debris, so that the probability errs on the high side, except for the few very
 * large objects. Public elements do not say how large an object is, so fleet and catalog get the same.
 */
export const DEFAULT_HARD_BODY_RADIUS_M = 5;

/** Nothing in public elements tells whether an object can maneuver, and a wrong YES or NO misleads. */
export const DEFAULT_MANEUVERABLE: Maneuverability = 'N/A';

const COLUMNS = ['name', 'hard_body_radius_m', 'maneuverable'] as const;

/**
 * Reads the objects file: CSV (see `readCsv`) with `designator` and any of `name`, `hard_body_radius_m`,
 * `maneuverable` (YES, NO or N/A). Empty cells leave the default.
 *
 * @param file as the user named it, for errors
 * @returns rows by designator, numbers in decimal without leading zeros (Alpha-5 is the same as the integer)
 * @throws InputError with file, line and value
 */
export function readObjects(text: string, file: string): Map<string, ListedObject> {
  const objects = new Map<string, ListedObject>();
  for (const record of readCsv(text, file, ['designator'], COLUMNS)) {
    const { line, cells } = record;
    const designator = parseDesignator(cells.designator);
    if (designator === undefined) {
      throw new InputError(
        `${file}:${line}: designator is ${JSON.stringify(cells.designator)}, expected ${DESIGNATOR_IN_WORDS}`,
      );
    }
    const earlier = objects.get(designator);
    if (earlier !== undefined) {
      throw new InputError(
        `${file}:${line}: designator ${cells.designator} is already on line ${earlier.line}: leave one row for each object`,
      );
    }
    objects.set(designator, {
      line,
      name: cells.name === '' ? undefined : cells.name,
      hardBodyRadiusM:
        cells.hard_body_radius_m === '' ? undefined : numberCell(record, file, 'hard_body_radius_m', RADIUS),
      maneuverable: maneuverableOf(cells.maneuverable, file, line),
    });
  }
  return objects;
}

const RADIUS = ['a number of meters greater than 0', (value: number) => value > 0] as const;

/** What is known of an object, with the defaults where nothing is. */
export function propertiesOf(
  objects: ReadonlyMap<string, ListedObject> | undefined,
  designator: string,
): ObjectProperties {
  const listed = objects?.get(designator);
  return {
    name: listed?.name,
    hardBodyRadiusM: listed?.hardBodyRadiusM ?? DEFAULT_HARD_BODY_RADIUS_M,
    maneuverable: listed?.maneuverable ?? DEFAULT_MANEUVERABLE,
    isDefaultRadius: listed?.hardBodyRadiusM === undefined,
  };
}

function maneuverableOf(text: string, file: string, line: number): Maneuverability | undefined {
  if (text === '') return undefined;
  if (text === 'YES' || text === 'NO' || text === 'N/A') return text;
  throw new InputError(
    `${file}:${line}: maneuverable is ${JSON.stringify(text)}, expected YES, NO, N/A or an empty cell`,
  );
}
