import { CAUTION } from '../caution.js';
import { wrap } from './wrap.js';

/** What the command tells its caller; a subcommand uses those that apply to it. */
export const EXIT_STATUS = { done: 0, unexpected: 1, input: 2, alert: 3, locked: 4 } as const;

/** For the end of the help of a command that screens. */
export const EXIT_STATUS_HELP = `Exit status
  0 done             3 done, and an encounter reaches --alert-pc
  1 unexpected error 4 another run is writing the same output
  2 a mistake in the options or the input, or output that cannot be written
  129, 130, 143 stopped by SIGHUP, SIGINT, SIGTERM: nothing of the run is kept`;

/** The caution, broken into lines of less than 80 columns. */
export const CAUTION_IN_HELP = wrap(CAUTION, 79).join('\n');
