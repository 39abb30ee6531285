import type { Log } from '../jobs/log.js';
import type { Progress } from '../jobs/screen-options.js';

/** A job that is over sooner than this needs no line on the way. */
const QUIET_MS = 60_000;

/**
 * Progress for a log that nobody watches: one line a quarter of a stage, none in the first minute.
 *
 * @param nowMs steady clock, milliseconds
 */
export function createProgressLog(log: Pick<Log, 'info'>, nowMs: () => number): (progress: Progress) => void {
  const startedMs = nowMs();
  let stage = '';
  let told = 0;
  return (progress) => {
    if (progress.stage !== stage) {
      stage = progress.stage;
      told = 0;
    }
    const quarter = Math.floor(progress.fraction * 4);
    if (quarter <= told || nowMs() - startedMs < QUIET_MS) return;
    told = quarter;
    log.info(`${stage} ${25 * quarter} %: ${progress.detail}`);
  };
}
