import { InputError } from '../input-error.js';
import { COMMON_OPTIONS, type CommandResult, defineCommand } from './command.js';
import { CAUTION_IN_HELP, EXIT_STATUS } from './exit-status.js';
import { type Options, optionsHelp } from './options.js';

const ASSESS_OPTIONS = {
  'hard-body-radius': {
    kind: 'number',
    value: 'M',
    above: 0,
    max: 10_000,
    help: 'sum of the radii of both objects, meters; messages do not carry it',
  },
  'monte-carlo': {
    kind: 'number',
    value: 'N',
    integer: true,
    min: 1,
    max: 1e9,
    help: 'also try N random errors along the curved path',
    defaultInWords: 'none',
  },
  seed: {
    kind: 'number',
    value: 'N',
    integer: true,
    min: 0,
    default: 1,
    help: 'of the random errors: the same seed gives the same figure',
  },
} as const satisfies Options;

const HELP = `wideberth assess MESSAGE --hard-body-radius M [options]

Reads a conjunction data message (CCSDS 508.0-B-1, KVN) and prints what it says
beside what wideberth computes from its two states and covariances: distance,
relative speed and position in RTN, collision probability by Foster's method and
along the curved path, the highest probability over all scales of the sigmas.

${optionsHelp({ ...ASSESS_OPTIONS, ...COMMON_OPTIONS })}

An example
  wideberth assess message.kvn --hard-body-radius 10 --monte-carlo 1000000

Exit status
  0 done   1 unexpected error   2 a mistake in the options or in the message

${CAUTION_IN_HELP}`;

export const assessCommand = defineCommand({
  name: 'assess',
  summary: 'check the figures of a conjunction message',
  help: HELP,
  options: ASSESS_OPTIONS,
  argument: 'message',
  run: async (values, _ports, file): Promise<CommandResult> => {
    const hardBodyRadiusM = values['hard-body-radius'];
    if (hardBodyRadiusM === undefined) {
      throw new InputError(
        'no size of the objects: give --hard-body-radius M, the sum of both radii in meters',
      );
    }
    // Loaded when it is needed: help, and mistakes in the options, are there at once.
    const { assessMessage } = await import('../jobs/assess-message.js');
    const lines = await assessMessage(file, hardBodyRadiusM, values['monte-carlo'], values.seed);
    return { lines, status: EXIT_STATUS.done };
  },
});
