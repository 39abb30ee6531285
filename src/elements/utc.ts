const UTC_PATTERN =
  /^(\d{4})-(?:(\d{2})-(\d{2})|(\d{3}))(?:[T ](\d{2}):(\d{2})(?::(\d{2})(\.\d+)?)?)?(?:Z|\+00:?00)?$/;
const MS_PER_DAY = 86_400_000;

/**
 * Reads a UTC time in ISO 8601, as CCSDS writes it: calendar date or day of year, seconds and their
 * fraction optional, zone `Z` or none (CCSDS 301.0-B, ASCII codes A and B).
 *
 * @returns milliseconds since 1970-01-01 with the whole fraction, or `undefined` if it is no such time or
 * lies before the year 1000.
 * A leap second (`:60`) is the first second of the next minute, as in POSIX time.
 */
export function parseUtc(text: string): number | undefined {
  const match = UTC_PATTERN.exec(text.trim());
  if (match === null) return undefined;
  const year = Number(match[1]);
  const month = match[4] === undefined ? Number(match[2]) : 1;
  const day = Number(match[4] ?? match[3]);
  const hour = Number(match[5] ?? 0);
  const minute = Number(match[6] ?? 0);
  const second = Number(match[7] ?? 0);
  if (year < 1000 || month < 1 || month > 12 || day < 1 || hour > 23 || minute > 59 || second > 60)
    return undefined;
  const midnightMs = Date.UTC(year, month - 1, day);
  const lastDay = match[4] === undefined ? new Date(Date.UTC(year, month, 0)).getUTCDate() : daysInYear(year);
  if (day > lastDay) return undefined;
  return midnightMs + ((hour * 60 + minute) * 60 + second) * 1000 + Number(match[8] ?? 0) * 1000;
}

/** Writes a time as `YYYY-MM-DDThh:mm:ss.mmmZ`, rounded to the nearest millisecond; `ms` must be finite. */
export function formatUtc(ms: number): string {
  return new Date(Math.round(ms)).toISOString();
}

/** Milliseconds since 1970-01-01 of day `dayOfYear` (1.0 is the midnight that starts the year) of `year`. */
export function dayOfYearToMs(year: number, dayOfYear: number): number {
  return Date.UTC(year, 0, 1) + (dayOfYear - 1) * MS_PER_DAY;
}

/** 365 or 366; `year` from 1000 on. */
export function daysInYear(year: number): number {
  return (Date.UTC(year + 1, 0, 1) - Date.UTC(year, 0, 1)) / MS_PER_DAY;
}
