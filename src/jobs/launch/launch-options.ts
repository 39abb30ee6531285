import type { ScreeningVolume } from '../../encounters/volume.js';
import type { Vector3 } from '../../vector.js';

/** Everything the screening of a launch depends on; checked and complete, paths as the process can open them. */
export type LaunchOptions = {
  /** Element-set files of the batch; several where it flies on one set after the other. */
  readonly batchPaths: readonly string[];
  /** From when to when each set of the batch holds; `undefined`: from release on. */
  readonly validityPath: string | undefined;
  readonly fleetPaths: readonly string[];
  readonly catalogPaths: readonly string[];
  /** Nominal liftoff, milliseconds of UTC since 1970-01-01, as all times here. */
  readonly liftoffMs: number;
  /** One time for all objects, or a file with one for each. */
  readonly release: { readonly ms: number } | { readonly path: string };
  /** Length of the window from the first release on. */
  readonly days: number;
  readonly volume: ScreeningVolume;
  /** Liftoffs beside the nominal one, `undefined` for none; minutes, the first may be negative. */
  readonly slips: SlipRange | undefined;
  readonly limits: LiftoffLimits;
  readonly injection: InjectionErrors;
  readonly objectsPath: string | undefined;
  readonly sigmaPath: string | undefined;
  readonly maxAgeDays: number;
  readonly workers: number;
  readonly outPath: string;
  /** Encounters of this collision probability or more get a conjunction message. */
  readonly cdmFromPc: number | undefined;
  /** Rows of the ranked table on standard output. */
  readonly top: number;
};

export type SlipRange = { readonly fromMin: number; readonly toMin: number; readonly everyMin: number };

/** What a liftoff must keep to be called clear. */
export type LiftoffLimits = {
  /** No encounter closer than this. */
  readonly clearKm: number | undefined;
  /** No encounter of this collision probability or more. */
  readonly alertPc: number | undefined;
};

/** Position errors of the batch. */
export type InjectionErrors = {
  /** One-sigma at release, meters. */
  readonly sigmaRtnM: Vector3;
  /** Growth of the transverse one-sigma. */
  readonly growthMPerDay: number;
  /** No figure of the user among them. */
  readonly isDefault: boolean;
};

export type LaunchOutcome = {
  /** What goes to standard output. */
  readonly lines: readonly string[];
  /** At least one encounter of the nominal liftoff reaches the limit of probability. */
  readonly alertReached: boolean;
};
