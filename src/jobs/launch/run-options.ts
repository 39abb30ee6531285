import { formatUtc } from '../../elements/utc.js';
import { recordedVolume } from '../run-record.js';
import type { LaunchOptions } from './launch-options.js';

/** Options for `run.json`, named as on the command line; the number of workers changes no result and stays out. */
export function recordedLaunchOptions(options: LaunchOptions): Readonly<Record<string, unknown>> {
  const { volume, release, slips } = options;
  return {
    batch: options.batchPaths,
    'batch-validity': options.validityPath ?? null,
    fleet: options.fleetPaths,
    catalog: options.catalogPaths,
    liftoff: formatUtc(options.liftoffMs),
    ...('ms' in release ? { release: formatUtc(release.ms) } : { 'release-times': release.path }),
    days: options.days,
    ...recordedVolume(volume),
    'slip-from': slips?.fromMin ?? null,
    'slip-to': slips?.toMin ?? null,
    'slip-every': slips?.everyMin ?? null,
    'clear-km': options.limits.clearKm ?? null,
    'alert-pc': options.limits.alertPc ?? null,
    'batch-sigma-rtn-m': options.injection.sigmaRtnM,
    'batch-growth-m-per-day': options.injection.growthMPerDay,
    objects: options.objectsPath ?? null,
    sigma: options.sigmaPath ?? null,
    'max-age-days': options.maxAgeDays,
    out: options.outPath,
    'cdm-from-pc': options.cdmFromPc ?? null,
    top: options.top,
  };
}
