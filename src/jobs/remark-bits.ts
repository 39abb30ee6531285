import { REMARKS, type RemarkCode } from '../probability/remarks.js';

const CODES = Object.keys(REMARKS) as RemarkCode[];

/** The remarks of a row as one number, a bit each, for a flat record. */
export function bitsOfRemarks(remarks: readonly RemarkCode[]): number {
  return remarks.reduce((bits, code) => bits | (1 << CODES.indexOf(code)), 0);
}

/** The remarks back from their bits, in the order of `REMARKS`. */
export function remarksOfBits(bits: number): RemarkCode[] {
  return CODES.filter((_, i) => (bits & (1 << i)) !== 0);
}
