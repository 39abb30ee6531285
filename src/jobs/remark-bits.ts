import { REMARKS, type RemarkCode } from '../probability/remarks.js';

const CODES = Object.keys(REMARKS) as RemarkCode[];

/** The remarks of a row from the bits that `remarkBitsOf` makes of them, in the order of `REMARKS`. */
export function remarksOfBits(bits: number): RemarkCode[] {
  return CODES.filter((_, i) => (bits & (1 << i)) !== 0);
}
