import { availableParallelism } from 'node:os';
import { InputError } from '../input-error.js';
import { LONGEST_WINDOW_DAYS, type SharedOptions } from '../jobs/screen-options.js';
import { MAX_HALF_SIZE_KM, type Options, type Values } from './options.js';
import { volumeOf } from './volume-of.js';

/** What a command has of its own in the options of every screening: defaults, and words of the help. */
type OwnInShared = {
  readonly fleetIs: string;
  readonly catalogIs: string;
  readonly defaultDays: number;
  readonly daysHelp: string;
  readonly defaultMissKm: number;
  /** Whose RTN the volume lies in. */
  readonly volumeAround: string;
  readonly sigmaHelp: string;
  readonly alertPcHelp: string;
  /** Which encounters get a message. */
  readonly messageFor: string;
};

/** The options of every screening, in the words of one command. */
export function sharedOptions(own: OwnInShared) {
  return {
    fleet: {
      kind: 'paths',
      value: 'FILE',
      help: `${own.fleetIs}: TLE or OMM, also gzip, - for stdin; repeatable`,
    },
    catalog: { kind: 'paths', value: 'FILE', help: `${own.catalogIs}; the same, repeatable` },
    days: {
      kind: 'number',
      value: 'N',
      default: own.defaultDays,
      above: 0,
      max: LONGEST_WINDOW_DAYS,
      help: own.daysHelp,
    },
    'miss-km': {
      kind: 'number',
      value: 'KM',
      above: 0,
      max: MAX_HALF_SIZE_KM,
      help: 'list passes closer than this',
      defaultInWords: String(own.defaultMissKm),
    },
    'volume-rtn-km': {
      kind: 'half-sizes',
      value: 'R,T,N',
      help: `in place of --miss-km: half-sizes of a volume in RTN of ${own.volumeAround}`,
    },
    'volume-shape': {
      kind: 'choice',
      value: 'SHAPE',
      choices: ['BOX', 'ELLIPSOID'],
      help: 'its shape, BOX or ELLIPSOID',
      defaultInWords: 'BOX',
    },
    objects: { kind: 'path', value: 'CSV', help: 'per object: name, radius, maneuverable' },
    sigma: { kind: 'path', value: 'CSV', help: own.sigmaHelp },
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
    'alert-pc': { kind: 'number', value: 'P', above: 0, max: 1, help: own.alertPcHelp },
    'cdm-from-pc': {
      kind: 'number',
      value: 'P',
      min: 0,
      max: 1,
      help: `write a CCSDS 508 message for each ${own.messageFor}from this probability`,
    },
    top: {
      kind: 'number',
      value: 'N',
      integer: true,
      min: 0,
      default: 15,
      help: 'rows of the printed table',
    },
  } as const satisfies Options;
}

/** Options of which one gives way to the other. */
export const VOLUME_ALTERNATIVES = [['miss-km'], ['volume-rtn-km', 'volume-shape']] as const;

/**
 * Makes of the shared options what a job takes.
 *
 * @throws InputError for options that do not fit together.
 */
export function sharedJobOptions(
  values: Omit<Values<ReturnType<typeof sharedOptions>>, 'alert-pc'>,
  defaultMissKm: number,
): SharedOptions {
  if (values.out === undefined) throw new InputError('no place for the results: give --out DIR');
  return {
    fleetPaths: values.fleet,
    catalogPaths: values.catalog,
    days: values.days,
    volume: volumeOf(values, defaultMissKm),
    objectsPath: values.objects,
    sigmaPath: values.sigma,
    maxAgeDays: values['max-age-days'],
    workers: values.workers ?? availableParallelism(),
    outPath: values.out,
    cdmFromPc: values['cdm-from-pc'],
    top: values.top,
  };
}

/** @throws InputError where standard input would have to be read twice */
export function expectOneStdin(paths: readonly string[]): void {
  if (paths.filter((path) => path === '-').length > 1) {
    throw new InputError('- (standard input) is named more than once, but can be read only once');
  }
}
