/** Where an element set was read, so that every message can point at it. */
export type ElementSource = {
  /** Path as the user gave it, `-` for standard input. */
  readonly file: string;
  /** First line of the set, counted from 1; in a format without lines, the index of the record, from 1. */
  readonly line: number;
  /** The set as it stood in the file, its lines joined by `\n`. */
  readonly text: string;
};

/**
 * One mean element set for SGP4, whatever format it came in: angles in degrees, mean motion in
 * revolutions a day (Kozai, as published), frame TEME of epoch.
 */
export type ElementSet = {
  /** Catalog number in decimal without leading zeros (Alpha-5 resolved), up to nine digits. */
  readonly designator: string;
  /** Object name, `''` when the source has none. */
  readonly name: string;
  /** `YYYY-NNNP{PP}`, `''` when the source has none. */
  readonly internationalDesignator: string;
  /** Epoch in milliseconds of UTC since 1970-01-01, with its fraction. */
  readonly epochMs: number;
  readonly meanMotionRevPerDay: number;
  readonly eccentricity: number;
  readonly inclinationDeg: number;
  readonly rightAscensionDeg: number;
  readonly argumentOfPerigeeDeg: number;
  readonly meanAnomalyDeg: number;
  /** Drag term B*, per Earth radius. */
  readonly bstar: number;
  readonly source: ElementSource;
};

/** Why a set was not used; `failed` sets were used until SGP4 gave up inside the window. */
export type UnusedReason = 'rejected' | 'superseded' | 'failed';

export type UnusedElements = {
  readonly source: ElementSource;
  /** `''` when it could not be read. */
  readonly designator: string;
  readonly reason: UnusedReason;
  /** What is wrong with which value, or which set took its place. */
  readonly detail: string;
  /** When SGP4 gave up, in milliseconds of UTC since 1970-01-01; only for `failed`. */
  readonly failedAtMs?: number;
};

/** What one input file held; `read` = `used` + `superseded` + `rejected`. */
export type FileCount = {
  readonly file: string;
  /** SHA-256 of the bytes as they lay on disk, hexadecimal. */
  readonly sha256: string;
  readonly read: number;
  readonly used: number;
  readonly superseded: number;
  readonly rejected: number;
};
