import { formatUtc } from '../../elements/utc.js';
import type { JobPorts } from '../screen-options.js';
import type { ScreenedObject } from '../screened-object.js';
import type { SearchOutcome, SearchWorkers } from '../search-in-workers.js';
import type { LaunchOptions } from './launch-options.js';
import { liftoffRows, type UnrankedLiftoff } from './liftoff-rows.js';
import { type LiftoffSearch, slipGroups } from './liftoff-search.js';

/**
 * The rows of all liftoffs but the nominal one.
 *
 * @param phaseCount phases of the batch in one liftoff
 * @param knownFailures where the sets stand that are told of already
 */
export async function slippedRows(
  slipsMs: readonly number[],
  searchOf: (slipsMs: readonly number[]) => LiftoffSearch,
  phaseCount: number,
  knownFailures: ReadonlySet<unknown>,
  workers: SearchWorkers,
  options: LaunchOptions,
  ports: JobPorts,
): Promise<UnrankedLiftoff[]> {
  const rows: UnrankedLiftoff[] = [];
  if (slipsMs.length === 0) return rows;
  for (const group of slipGroups(slipsMs, phaseCount)) {
    const search = searchOf(group);
    ports.log.info(
      `searching ${group.length} more liftoffs, ${formatUtc(options.liftoffMs + group[0])} to ${formatUtc(options.liftoffMs + group[group.length - 1])}`,
    );
    const outcome = await workers.search(search.plan);
    warnOfNewFailures(outcome, search.objects, knownFailures, ports);
    rows.push(...liftoffRows(search, outcome.records, options.liftoffMs, options.limits));
  }
  return rows;
}

/** `unused-elements.csv` is about the nominal liftoff; what fails only later must not go unsaid. */
function warnOfNewFailures(
  outcome: SearchOutcome,
  objects: readonly ScreenedObject[],
  known: ReadonlySet<unknown>,
  ports: Pick<JobPorts, 'log'>,
): void {
  for (const [index, lastMs] of outcome.lastMsOf) {
    const { set, designator, isPredicted } = objects[index];
    // A slip turns and delays the batch; it decays as it does with the nominal liftoff.
    if (isPredicted || known.has(set.source)) continue;
    ports.log.warn(
      `${set.source.file}:${set.source.line}: SGP4 gives no state of ${designator} after ${formatUtc(lastMs)}, within the window of a slipped liftoff: not met from then on`,
    );
  }
}
