/** Throws a RangeError with the argument's name and its value unless it is a finite number. */
export function requireFinite(name: string, value: unknown): asserts value is number {
  if (!Number.isFinite(value)) throw new RangeError(`${name} must be a finite number, got ${shown(value)}`);
}

/** Throws a RangeError unless `value` is a finite number greater than 0. */
export function requirePositive(name: string, value: unknown): asserts value is number {
  requireFinite(name, value);
  if (value <= 0) throw new RangeError(`${name} must be greater than 0, got ${value}`);
}

/** Throws a RangeError unless `value` is a finite number of at least 0. */
export function requireNotNegative(name: string, value: unknown): asserts value is number {
  requireFinite(name, value);
  if (value < 0) throw new RangeError(`${name} must not be negative, got ${value}`);
}

/** A value as an error shows it: text in quotes, so that "1" is told from 1. */
export function shown(value: unknown): string {
  if (typeof value === 'string') return JSON.stringify(value);
  if (Array.isArray(value)) return `[${value.map(shown).join(', ')}]`;
  return String(value);
}
