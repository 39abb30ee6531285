/** A name fit for tables, messages and a terminal: control characters and runs of blanks become one blank. */
export function cleanName(text: string): string {
  return text.replace(/[\s\p{Cc}\p{Cf}]+/gu, ' ').trim();
}
