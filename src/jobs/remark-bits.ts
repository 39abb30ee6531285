import { REMARKS, type RemarkCode } from '../probability/remarks.js';

const CODES = Object.keys(REMARKS) as RemarkCode[];

const lists = new Map<number, readonly RemarkCode[]>();

/**
 * The remarks of a row from the bits that `remarkBitsOf` makes of them, in the order of `REMARKS`: one list
 * for all rows of the same bits.
 */
export function remarksOfBits(bits: number): readonly RemarkCode[] {
  let list = lists.get(bits);
  if (list === undefined) {
    list = CODES.filter((_, i) => (bits & (1 << i)) !== 0);
    lists.set(bits, list);
  }
  return list;
}
