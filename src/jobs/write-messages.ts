import type { ScreeningVolume } from '../encounters/volume.js';
import { conjunctionMessageFileName, formatConjunctionMessage } from '../tables/conjunction-message.js';
import type { RankedConjunctions } from '../tables/terminal-table.js';
import type { OutputFolder } from './output-folder.js';
import type { JobPorts } from './screen-options.js';

/**
 * Writes a conjunction message for each conjunction from a probability on, into `cdm/`.
 *
 * @param fromPc `undefined` for no messages
 * @returns number of messages
 */
export function writeMessages(
  folder: OutputFolder,
  ranked: RankedConjunctions,
  fromPc: number | undefined,
  window: { readonly startMs: number; readonly endMs: number; readonly volume: ScreeningVolume },
  ports: Pick<JobPorts, 'nowMs'>,
): number {
  if (fromPc === undefined) return 0;
  const run = {
    originator: 'WIDEBERTH',
    creationMs: ports.nowMs(),
    screenStartMs: window.startMs,
    screenStopMs: window.endMs,
    volume: window.volume,
  };
  let written = 0;
  for (; written < ranked.count; written++) {
    const conjunction = ranked.at(written);
    if (!((conjunction.collisionProbability ?? -1) >= fromPc)) break;
    folder.write(
      `cdm/${conjunctionMessageFileName(conjunction)}`,
      formatConjunctionMessage(conjunction, run),
    );
  }
  return written;
}
