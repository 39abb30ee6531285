const NUMBER = /^\d+$/;

/** Numbers by value and before anything else, the rest by code unit, whatever the locale. */
export function compareDesignators(a: string, b: string): number {
  const numberA = NUMBER.test(a);
  if (numberA !== NUMBER.test(b)) return numberA ? -1 : 1;
  const difference = numberA ? Number(a) - Number(b) : 0;
  if (difference !== 0) return difference;
  return a < b ? -1 : a > b ? 1 : 0;
}
