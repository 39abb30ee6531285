const LONGEST_QUOTE = 80;

/** What is wrong with one element set; caught where the set becomes a rejected record. */
export class Rejection extends Error {
  override readonly name = 'Rejection';
}

/** A value as it stood in the file, for a message: control characters escaped, cut when it is long. */
export function quoted(value: unknown): string {
  if (typeof value === 'object' && value !== null) return Array.isArray(value) ? 'an array' : 'an object';
  const text = String(value);
  const cut = text.length > LONGEST_QUOTE ? `${text.slice(0, LONGEST_QUOTE)}...` : text;
  return JSON.stringify(cut);
}
