import { LAUNCH_CAUTION } from '../caution.js';
import type { ScreeningVolume } from '../encounters/volume.js';
import { InputError } from '../input-error.js';
import {
  DEFAULT_INJECTION_GROWTH_M_PER_DAY,
  DEFAULT_INJECTION_SIGMA_RTN_M,
} from '../jobs/launch/injection-sigma.js';
import type { LaunchOptions, SlipRange } from '../jobs/launch/launch-options.js';
import { COMMON_OPTIONS, type CommandResult, defineCommand } from './command.js';
import { EXIT_STATUS, EXIT_STATUS_HELP } from './exit-status.js';
import { MAX_HALF_SIZE_KM, type Options, optionsHelp, type Values } from './options.js';
import { expectOneStdin, sharedJobOptions, sharedOptions, VOLUME_ALTERNATIVES } from './shared-options.js';
import { wrap } from './wrap.js';

const DEFAULT_MISS_KM = 25;
const DEFAULT_SLIP_EVERY_MIN = 1;
/** A week: a launch that slips by more gets elements of its own. */
const LARGEST_SLIP_MIN = 10_080;
const LARGEST_SIGMA_M = 1_000_000;

const SHARED = sharedOptions({
  fleetIs: 'your satellites in orbit',
  catalogIs: 'element sets of everything else',
  defaultDays: 3,
  daysHelp: 'length of the window from the first release on',
  defaultMissKm: DEFAULT_MISS_KM,
  volumeAround: 'the batch object',
  sigmaHelp: 'one-sigma table; rows of a batch designator replace the above',
  alertPcHelp:
    'a liftoff with an encounter of this probability is not clear; status 3 if the nominal one has it',
  messageFor: 'of the nominal liftoff ',
});

/** In the order of the help. */
const LAUNCH_OPTIONS = {
  batch: {
    kind: 'paths',
    value: 'FILE',
    help: 'predicted element sets of the batch: TLE or OMM; repeatable, with --batch-validity',
  },
  'batch-validity': { kind: 'path', value: 'CSV', help: 'from when to when each set of the batch holds' },
  fleet: SHARED.fleet,
  catalog: SHARED.catalog,
  liftoff: { kind: 'time', value: 'UTC', help: 'nominal liftoff that the batch sets are made for' },
  release: { kind: 'time', value: 'UTC', help: 'when the batch is released; nothing of it exists before' },
  'release-times': { kind: 'path', value: 'CSV', help: 'in place of --release: a time for each object' },
  days: SHARED.days,
  'miss-km': SHARED['miss-km'],
  'volume-rtn-km': SHARED['volume-rtn-km'],
  'volume-shape': SHARED['volume-shape'],
  'slip-from': {
    kind: 'number',
    value: 'MIN',
    min: -LARGEST_SLIP_MIN,
    max: LARGEST_SLIP_MIN,
    help: 'screen other liftoffs too: first slip in minutes, may be negative',
  },
  'slip-to': {
    kind: 'number',
    value: 'MIN',
    min: -LARGEST_SLIP_MIN,
    max: LARGEST_SLIP_MIN,
    help: 'last slip',
  },
  'slip-every': {
    kind: 'number',
    value: 'MIN',
    above: 0,
    help: 'minutes from one to the next',
    defaultInWords: String(DEFAULT_SLIP_EVERY_MIN),
  },
  'clear-km': {
    kind: 'number',
    value: 'KM',
    above: 0,
    max: MAX_HALF_SIZE_KM,
    help: 'a liftoff with a closer encounter is not clear',
  },
  'alert-pc': SHARED['alert-pc'],
  'batch-sigma-rtn-m': {
    kind: 'half-sizes',
    of: { words: 'sigmas', max: LARGEST_SIGMA_M, unit: 'm' },
    value: 'R,T,N',
    help: 'one-sigma position error of the batch at release',
    defaultInWords: DEFAULT_INJECTION_SIGMA_RTN_M.join(','),
  },
  'batch-growth-m-per-day': {
    kind: 'number',
    value: 'M',
    min: 0,
    max: LARGEST_SIGMA_M,
    help: 'growth of its T with time since release',
    defaultInWords: String(DEFAULT_INJECTION_GROWTH_M_PER_DAY),
  },
  objects: SHARED.objects,
  sigma: SHARED.sigma,
  'max-age-days': SHARED['max-age-days'],
  workers: SHARED.workers,
  out: SHARED.out,
  'cdm-from-pc': SHARED['cdm-from-pc'],
  top: SHARED.top,
} as const satisfies Options;

const HELP = `wideberth launch --batch FILE --catalog FILE --liftoff UTC --release UTC
  --out DIR [options]

Screens a launch batch from its release on against fleet and catalog, and against
itself, for the nominal liftoff and for slips of it; prints which liftoffs are
clear of the limits, and why others are not. The ascent up to release is not
screened. DIR gets slips.csv, conjunctions.csv, batch-pairs.csv and more.

${optionsHelp({ ...LAUNCH_OPTIONS, ...COMMON_OPTIONS })}

Objects of the batch go by designators of their own, B- and the name, or B-# and
the place in the file: catalog numbers in these sets are not used.
A slip delays all epochs and turns all nodes by what the Earth turns in it.
Clear: no encounter closer than --clear-km, none that reaches --alert-pc, nothing
that flies along; with neither of the two options, no encounter at all.
Sigma T at t days after release: root of T^2 + (growth t)^2; R and N stay.

${EXIT_STATUS_HELP}

${wrap(LAUNCH_CAUTION, 79).join('\n')}`;

export const launchCommand = defineCommand({
  name: 'launch',
  summary: 'screen a launch batch, and tell which liftoffs are clear',
  help: HELP,
  options: LAUNCH_OPTIONS,
  alternatives: [VOLUME_ALTERNATIVES, [['release'], ['release-times']]],
  run: async (values, ports): Promise<CommandResult> => {
    // Loaded when it is needed: help, and mistakes in the options, are there at once.
    const { launch } = await import('../jobs/launch/launch.js');
    const outcome = await launch(launchOptions(values), ports);
    return { lines: outcome.lines, status: outcome.alertReached ? EXIT_STATUS.alert : EXIT_STATUS.done };
  },
});

/**
 * Makes complete options for the job of what was given.
 *
 * @throws InputError for options that do not fit together.
 */
function launchOptions(values: Values<typeof LAUNCH_OPTIONS>): LaunchOptions {
  if (values.batch.length === 0) throw new InputError('no batch: give --batch FILE');
  if (values.fleet.length === 0 && values.catalog.length === 0) {
    throw new InputError('nothing to screen against: give --catalog FILE, --fleet FILE, or both');
  }
  expectOneStdin([...values.batch, ...values.fleet, ...values.catalog]);
  if (values.liftoff === undefined) throw new InputError('no liftoff: give --liftoff UTC');
  const shared = sharedJobOptions(values, DEFAULT_MISS_KM);
  return {
    ...shared,
    batchPaths: values.batch,
    validityPath: values['batch-validity'],
    liftoffMs: values.liftoff,
    release: releaseOf(values),
    slips: slipRange(values),
    limits: { clearKm: clearKm(values['clear-km'], shared.volume), alertPc: values['alert-pc'] },
    injection: {
      sigmaRtnM: values['batch-sigma-rtn-m'] ?? DEFAULT_INJECTION_SIGMA_RTN_M,
      growthMPerDay: values['batch-growth-m-per-day'] ?? DEFAULT_INJECTION_GROWTH_M_PER_DAY,
      isDefault: values['batch-sigma-rtn-m'] === undefined,
    },
  };
}

function releaseOf(values: Values<typeof LAUNCH_OPTIONS>): LaunchOptions['release'] {
  if (values.release !== undefined) return { ms: values.release };
  if (values['release-times'] !== undefined) return { path: values['release-times'] };
  throw new InputError('no release: give --release UTC, or --release-times CSV with a time for each object');
}

function slipRange(values: Values<typeof LAUNCH_OPTIONS>): SlipRange | undefined {
  const fromMin = values['slip-from'];
  const toMin = values['slip-to'];
  if (fromMin === undefined && toMin === undefined) {
    if (values['slip-every'] === undefined) return undefined;
    throw new InputError(
      `--slip-every is ${values['slip-every']}, but there is no range: give --slip-from MIN and --slip-to MIN`,
    );
  }
  if (fromMin === undefined || toMin === undefined) {
    const [given, missing] = fromMin === undefined ? ['to', 'from'] : ['from', 'to'];
    throw new InputError(`--slip-${given} is given, but not --slip-${missing}: give both`);
  }
  if (fromMin > toMin) {
    throw new InputError(`--slip-from is ${fromMin}, after --slip-to, ${toMin}: put the earlier one first`);
  }
  return { fromMin, toMin, everyMin: values['slip-every'] ?? DEFAULT_SLIP_EVERY_MIN };
}

/** A limit that reaches beyond the screening would call clear what was never looked at. */
function clearKm(limitKm: number | undefined, volume: ScreeningVolume): number | undefined {
  const reachKm = volume.shape === 'SPHERE' ? volume.missKm : Math.min(...volume.halfSizeRtnKm);
  if (limitKm !== undefined && limitKm > reachKm) {
    throw new InputError(
      `--clear-km is ${limitKm}, but passes are listed only within ${reachKm} km: give a larger ${volume.shape === 'SPHERE' ? '--miss-km' : '--volume-rtn-km'}`,
    );
  }
  return limitKm;
}
