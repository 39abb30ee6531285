/** Alpha-5: the letter stands for the first two digits, `A` for 10 to `Z` for 33; `I` and `O` are left out. */
const ALPHA_5_LETTERS = 'ABCDEFGHJKLMNPQRSTUVWXYZ';
const ALPHA_5 = /^([A-Z])(\d{4})$/;
const DIGITS = /^\d{1,9}$/;

/**
 * Reads a catalog number: up to nine digits, or the Alpha-5 form of two-line sets, so that `A0000` and
 * 100000 are the same object. (Alpha-5: common practice of the public catalog since 2020.)
 *
 * @param text without surrounding blanks
 * @returns decimal digits without leading zeros (`0` for zero), or `undefined` if it is no catalog number
 */
export function parseCatalogNumber(text: string): string | undefined {
  if (DIGITS.test(text)) return String(Number(text));
  const match = ALPHA_5.exec(text);
  if (match === null) return undefined;
  const index = ALPHA_5_LETTERS.indexOf(match[1]);
  return index < 0 ? undefined : String(10 + index) + match[2];
}
