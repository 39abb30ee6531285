import type { Log } from './log.js';

const SIGNAL_NUMBERS = { SIGHUP: 1, SIGINT: 2, SIGTERM: 15 } as const;

type StopSignal = keyof typeof SIGNAL_NUMBERS;

const SIGNALS = Object.keys(SIGNAL_NUMBERS) as StopSignal[];

/** The part of `process` that is used here. */
type RunningProcess = {
  readonly on: (name: StopSignal, listener: (signal: StopSignal) => void) => unknown;
  readonly off: (name: StopSignal, listener: (signal: StopSignal) => void) => unknown;
  readonly exit: (status: number) => never;
};

export type StopListener = {
  /** Registers what must be undone when the process is asked to stop; the returned function takes it back. */
  readonly onStop: (undo: () => void) => () => void;
  /** Stops listening: signals end the process at once again. */
  readonly close: () => void;
};

/**
 * Listens for SIGINT, SIGTERM and SIGHUP (a closed terminal). On the first, everything registered is undone,
 * the latest first, and the process ends with 128 plus the number of the signal, as shells count it.
 *
 * What is undone must be undone synchronously: nothing else of the program runs any more.
 */
export function listenForStop(
  log: Pick<Log, 'warn' | 'error'>,
  runningProcess: RunningProcess = process,
): StopListener {
  const undos = new Set<() => void>();
  const stop = (signal: StopSignal): void => {
    for (const name of SIGNALS) {
      runningProcess.off(name, stop);
      runningProcess.on(name, ignore);
    }
    log.warn(`stopped by ${signal}: nothing of this run is kept`);
    for (const undo of [...undos].reverse()) {
      try {
        undo();
      } catch (error) {
        log.error(`while stopping: ${(error as Error).message}`);
      }
    }
    runningProcess.exit(128 + SIGNAL_NUMBERS[signal]);
  };
  for (const name of SIGNALS) runningProcess.on(name, stop);
  return {
    onStop: (undo) => {
      undos.add(undo);
      return () => undos.delete(undo);
    },
    close: () => {
      for (const name of SIGNALS) runningProcess.off(name, stop);
    },
  };
}

function ignore(): void {}
