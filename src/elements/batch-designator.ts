import { parseCatalogNumber } from './catalog-number.js';

/*
 * Objects of a launch batch go by designators of their own: `B-` and the name, or `B-#` and the place in the
 * file. Whatever number stands in the set is not used, since before cataloging it is blank, zero, the same
 * for all or borrowed from somebody else.
 */

const BATCH_DESIGNATOR = /^B-(?:#\d+|[\p{L}\p{N}]+(?:-[\p{L}\p{N}]+)*(?:\.\d+)?)$/u;

/**
 * The designator of a batch object by its name: `B-` and the name in capitals, all but letters and digits
 * become one hyphen. Spellings of a name that differ in case, blanks or signs give the same.
 *
 * @param repeat counts the objects of one name, from 1; from the second on it follows after a point
 * @returns `undefined` when there is no letter or digit in the name
 */
export function batchDesignatorOfName(name: string, repeat = 1): string | undefined {
  const stem = name
    .normalize('NFC')
    .toUpperCase()
    .replace(/[^\p{L}\p{N}]+/gu, '-')
    .replace(/^-|-$/g, '');
  if (stem === '') return undefined;
  return repeat === 1 ? `B-${stem}` : `B-${stem}.${repeat}`;
}

/** The designator of a batch object without a name, by its place among the sets of the file, from 1. */
export function batchDesignatorOfPlace(place: number): string {
  return `B-#${place}`;
}

/** Whether a designator is one of a launch batch; catalog numbers never are. */
export function isBatchDesignator(designator: string): boolean {
  return BATCH_DESIGNATOR.test(designator);
}

/**
 * Reads the designator of any object: a catalog number as `parseCatalogNumber`, or one of a launch batch.
 *
 * @param text without surrounding blanks
 * @returns `undefined` if it is neither
 */
export function parseDesignator(text: string): string | undefined {
  return parseCatalogNumber(text) ?? (isBatchDesignator(text) ? text : undefined);
}

/** What `parseDesignator` takes, for messages. */
export const DESIGNATOR_IN_WORDS =
  'a catalog number of up to nine digits or in Alpha-5, or a designator of a launch batch such as B-NAME';
