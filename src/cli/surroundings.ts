import type { Log } from '../jobs/log.js';
import type { StopListener } from '../jobs/signals.js';

type Output = { readonly isTTY?: boolean; readonly write: (text: string) => unknown };

/** The process around a command line, so that tests can put their own in its place. */
export type Surroundings = {
  /** Carries only what was asked for: tables, help, version. */
  readonly stdout: Output;
  /** Carries the log, messages and the progress bar. */
  readonly stderr: Output;
  readonly environment: Readonly<Record<string, string | undefined>>;
  readonly nowMs: () => number;
  readonly version: string;
  /** Catches signals while a job is at work. */
  readonly listenForStop: (log: Log) => StopListener;
};
