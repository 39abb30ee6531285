import type { Vector3 } from '../../vector.js';
import type { SharedOptions } from '../screen-options.js';

/** Everything the screening of a launch depends on. The window counts from the first release on. */
export type LaunchOptions = SharedOptions & {
  /** Element-set files of the batch; several where it flies on one set after the other. */
  readonly batchPaths: readonly string[];
  /** From when to when each set of the batch holds; `undefined`: from release on. */
  readonly validityPath: string | undefined;
  /** Nominal liftoff, milliseconds of UTC since 1970-01-01, as all times here. */
  readonly liftoffMs: number;
  /** One time for all objects, or a file with one for each. */
  readonly release: { readonly ms: number } | { readonly path: string };
  /** Liftoffs beside the nominal one, `undefined` for none; minutes, the first may be negative. */
  readonly slips: SlipRange | undefined;
  readonly limits: LiftoffLimits;
  readonly injection: InjectionErrors;
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
