import { formatUtc } from '../../elements/utc.js';
import { InputError } from '../../input-error.js';
import type { OtherFile } from '../inputs.js';
import type { JobPorts } from '../screen-options.js';
import type { LaunchOptions } from './launch-options.js';
import { type BatchPhases, batchPhases, gapLine } from './phases.js';
import { type Batch, readBatch } from './read-batch.js';
import { readText } from './read-table.js';
import { readReleaseTimes } from './release-times.js';
import { readValidity } from './validity.js';

/**
 * Reads batch, releases and validities, and says in the log what is odd about them.
 *
 * @throws InputError where a file cannot be used, or they do not fit together
 */
export async function readLaunch(
  options: LaunchOptions,
  ports: Pick<JobPorts, 'log'>,
): Promise<{
  readonly batch: Batch;
  readonly window: BatchPhases;
  readonly tables: readonly OtherFile[];
}> {
  const { release, validityPath, liftoffMs } = options;
  const tables: OtherFile[] = [];
  const read = async (path: string) => {
    const { text, file } = await readText(path);
    tables.push(file);
    return text;
  };
  const batch = await readBatch(options.batchPaths);
  for (const warning of batch.warnings) ports.log.warn(warning);
  let releaseOf: (designator: string) => number;
  if ('ms' in release) {
    if (release.ms < liftoffMs) {
      throw new InputError(
        `--release is ${formatUtc(release.ms)}, before --liftoff at ${formatUtc(liftoffMs)}: check both`,
      );
    }
    releaseOf = () => release.ms;
  } else {
    const releases = readReleaseTimes(await read(release.path), release.path, batch.sets, liftoffMs);
    releaseOf = (designator) => releases.get(designator) as number;
  }
  const validity =
    validityPath === undefined
      ? undefined
      : readValidity(await read(validityPath), validityPath, options.batchPaths, batch.sets);
  const window = batchPhases(batch.sets, releaseOf, validity, validityPath, options.days);
  if (window.gaps.length > 0) ports.log.warn(gapLine(window.gaps, validityPath));
  return { batch, window, tables };
}
