import { resolve, sep } from 'node:path';
import { InputError } from '../input-error.js';
import type { JobPorts, ScreenOptions } from '../jobs/screen-options.js';
import { COMMON_OPTIONS, type CommandResult, defineCommand } from './command.js';
import { CAUTION_IN_HELP, EXIT_STATUS, EXIT_STATUS_HELP } from './exit-status.js';
import { type Options, optionsHelp, type Values } from './options.js';
import { expectOneStdin, sharedJobOptions, sharedOptions, VOLUME_ALTERNATIVES } from './shared-options.js';

const MS_PER_MINUTE = 60_000;
const DEFAULT_MISS_KM = 5;

const SHARED = sharedOptions({
  fleetIs: 'your element sets',
  catalogIs: 'element sets to screen against',
  defaultDays: 7,
  daysHelp: 'length of the window',
  defaultMissKm: DEFAULT_MISS_KM,
  volumeAround: 'object 1',
  sigmaHelp: 'one-sigma table by kind of orbit and element age',
  alertPcHelp: 'status 3 if an encounter reaches this probability',
  messageFor: '',
});

/** In the order of the help. */
export const SCREEN_OPTIONS = {
  fleet: SHARED.fleet,
  catalog: SHARED.catalog,
  'all-on-all': { kind: 'flag', help: 'no fleet: every catalog object against every other' },
  'within-fleet': { kind: 'flag', help: 'also the fleet against itself' },
  start: { kind: 'time', value: 'UTC', help: 'start of the window', defaultInWords: 'now, to the minute' },
  days: SHARED.days,
  'miss-km': SHARED['miss-km'],
  'volume-rtn-km': SHARED['volume-rtn-km'],
  'volume-shape': SHARED['volume-shape'],
  objects: SHARED.objects,
  sigma: SHARED.sigma,
  'max-age-days': SHARED['max-age-days'],
  workers: SHARED.workers,
  out: SHARED.out,
  history: { kind: 'path', value: 'DIR', help: 'keep each run there and write changes.csv' },
  'keep-runs': {
    kind: 'number',
    value: 'N',
    integer: true,
    min: 1,
    help: 'keep only the latest N runs in --history',
    defaultInWords: 'all',
  },
  'alert-pc': SHARED['alert-pc'],
  'cdm-from-pc': SHARED['cdm-from-pc'],
  top: SHARED.top,
} as const satisfies Options;

const HELP = `wideberth screen --fleet FILE --catalog FILE --out DIR [options]

Finds where objects of the fleet pass close to objects of the catalog, ranks the
encounters by collision probability and writes DIR/conjunctions.csv and more.

${optionsHelp({ ...SCREEN_OPTIONS, ...COMMON_OPTIONS })}

${EXIT_STATUS_HELP}

${CAUTION_IN_HELP}`;

export const screenCommand = defineCommand({
  name: 'screen',
  summary: 'find and rank the close approaches of a fleet with a catalog',
  help: HELP,
  options: SCREEN_OPTIONS,
  alternatives: [VOLUME_ALTERNATIVES, [['all-on-all'], ['fleet', 'within-fleet']]],
  run: async (values, ports): Promise<CommandResult> => {
    // Loaded when it is needed: help, and mistakes in the options, are there at once.
    const { screen } = await import('../jobs/screen.js');
    const outcome = await screen(screenOptions(values, ports), ports);
    return { lines: outcome.lines, status: outcome.alertReached ? EXIT_STATUS.alert : EXIT_STATUS.done };
  },
});

/**
 * Makes complete options for the job of what was given.
 *
 * @throws InputError for options that do not fit together.
 */
function screenOptions(values: Values<typeof SCREEN_OPTIONS>, ports: Pick<JobPorts, 'nowMs'>): ScreenOptions {
  const allOnAll = values['all-on-all'];
  const withinFleet = values['within-fleet'];
  if (!allOnAll && values.fleet.length === 0) {
    throw new InputError(
      'no fleet: give --fleet FILE, or --all-on-all for every catalog object against every other',
    );
  }
  if (values.catalog.length === 0 && !withinFleet) {
    throw new InputError(
      allOnAll
        ? 'no catalog: give --catalog FILE'
        : 'no catalog: give --catalog FILE, or --within-fleet for the fleet against itself',
    );
  }
  expectOneStdin([...values.fleet, ...values.catalog]);
  const shared = sharedJobOptions(values, DEFAULT_MISS_KM);
  if (values['keep-runs'] !== undefined && values.history === undefined) {
    throw new InputError(
      `--keep-runs is ${values['keep-runs']}, but there is no --history DIR to keep runs in`,
    );
  }
  if (values.history !== undefined && resolve(values.history) === resolve(shared.outPath)) {
    throw new InputError(`--out and --history are both ${shared.outPath}: name two folders`);
  }
  if (
    values.history !== undefined &&
    resolve(values.history).startsWith(`${resolve(shared.outPath)}${sep}`)
  ) {
    throw new InputError(
      `--history is ${values.history}, inside --out ${shared.outPath}, which is replaced as a whole: name a folder beside it`,
    );
  }
  return {
    ...shared,
    allOnAll,
    withinFleet,
    startMs: values.start ?? Math.floor(ports.nowMs() / MS_PER_MINUTE) * MS_PER_MINUTE,
    historyPath: values.history,
    keepRuns: values['keep-runs'],
    alertPc: values['alert-pc'],
  };
}
