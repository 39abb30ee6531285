import { availableParallelism } from 'node:os';
import { resolve, sep } from 'node:path';
import { InputError } from '../input-error.js';
import { type JobPorts, LONGEST_WINDOW_DAYS, type ScreenOptions } from '../jobs/screen-options.js';
import { COMMON_OPTIONS, type CommandResult, defineCommand } from './command.js';
import { CAUTION_IN_HELP, EXIT_STATUS, EXIT_STATUS_HELP } from './exit-status.js';
import { MAX_HALF_SIZE_KM, type Options, optionsHelp, type Values } from './options.js';
import { volumeOf } from './volume-of.js';

const MS_PER_MINUTE = 60_000;
const DEFAULT_MISS_KM = 5;

export const SCREEN_OPTIONS = {
  fleet: {
    kind: 'paths',
    value: 'FILE',
    help: 'your element sets: TLE or OMM, also gzip, - for stdin; repeatable',
  },
  catalog: { kind: 'paths', value: 'FILE', help: 'element sets to screen against; the same, repeatable' },
  'all-on-all': { kind: 'flag', help: 'no fleet: every catalog object against every other' },
  'within-fleet': { kind: 'flag', help: 'also the fleet against itself' },
  start: { kind: 'time', value: 'UTC', help: 'start of the window', defaultInWords: 'now, to the minute' },
  days: {
    kind: 'number',
    value: 'N',
    default: 7,
    above: 0,
    max: LONGEST_WINDOW_DAYS,
    help: 'length of the window',
  },
  'miss-km': {
    kind: 'number',
    value: 'KM',
    above: 0,
    max: MAX_HALF_SIZE_KM,
    help: 'list passes closer than this',
    defaultInWords: String(DEFAULT_MISS_KM),
  },
  'volume-rtn-km': {
    kind: 'half-sizes',
    value: 'R,T,N',
    help: 'in place of --miss-km: half-sizes of a volume in RTN of object 1',
  },
  'volume-shape': {
    kind: 'choice',
    value: 'SHAPE',
    choices: ['BOX', 'ELLIPSOID'],
    help: 'its shape, BOX or ELLIPSOID',
    defaultInWords: 'BOX',
  },
  objects: { kind: 'path', value: 'CSV', help: 'per object: name, radius, maneuverable' },
  sigma: { kind: 'path', value: 'CSV', help: 'one-sigma table by kind of orbit and element age' },
  'max-age-days': {
    kind: 'number',
    value: 'N',
    default: 30,
    above: 0,
    max: 3650,
    help: 'warn of element sets older than this',
  },
  workers: {
    kind: 'number',
    value: 'N',
    integer: true,
    min: 1,
    max: 256,
    help: 'threads',
    defaultInWords: 'all cores',
  },
  out: { kind: 'path', value: 'DIR', help: 'where the results go, replaced as a whole' },
  history: { kind: 'path', value: 'DIR', help: 'keep each run there and write changes.csv' },
  'keep-runs': {
    kind: 'number',
    value: 'N',
    integer: true,
    min: 1,
    help: 'keep only the latest N runs in --history',
    defaultInWords: 'all',
  },
  'alert-pc': {
    kind: 'number',
    value: 'P',
    above: 0,
    max: 1,
    help: 'status 3 if an encounter reaches this probability',
  },
  'cdm-from-pc': {
    kind: 'number',
    value: 'P',
    min: 0,
    max: 1,
    help: 'write a CCSDS 508 message for each from this probability',
  },
  top: { kind: 'number', value: 'N', integer: true, min: 0, default: 15, help: 'rows of the printed table' },
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
  alternatives: [
    [['miss-km'], ['volume-rtn-km', 'volume-shape']],
    [['all-on-all'], ['fleet', 'within-fleet']],
  ],
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
export function screenOptions(
  values: Values<typeof SCREEN_OPTIONS>,
  ports: Pick<JobPorts, 'nowMs'>,
): ScreenOptions {
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
  if ([...values.fleet, ...values.catalog].filter((path) => path === '-').length > 1) {
    throw new InputError('- (standard input) is named more than once, but can be read only once');
  }
  if (values.out === undefined) throw new InputError('no place for the results: give --out DIR');
  if (values['keep-runs'] !== undefined && values.history === undefined) {
    throw new InputError(
      `--keep-runs is ${values['keep-runs']}, but there is no --history DIR to keep runs in`,
    );
  }
  if (values.history !== undefined && resolve(values.history) === resolve(values.out)) {
    throw new InputError(`--out and --history are both ${values.out}: name two folders`);
  }
  if (values.history !== undefined && resolve(values.history).startsWith(`${resolve(values.out)}${sep}`)) {
    throw new InputError(
      `--history is ${values.history}, inside --out ${values.out}, which is replaced as a whole: name a folder beside it`,
    );
  }
  return {
    fleetPaths: values.fleet,
    catalogPaths: values.catalog,
    allOnAll,
    withinFleet,
    startMs: values.start ?? Math.floor(ports.nowMs() / MS_PER_MINUTE) * MS_PER_MINUTE,
    days: values.days,
    volume: volumeOf(values, DEFAULT_MISS_KM),
    objectsPath: values.objects,
    sigmaPath: values.sigma,
    maxAgeDays: values['max-age-days'],
    workers: values.workers ?? availableParallelism(),
    outPath: values.out,
    historyPath: values.history,
    keepRuns: values['keep-runs'],
    alertPc: values['alert-pc'],
    cdmFromPc: values['cdm-from-pc'],
    top: values.top,
  };
}
