import { InputError } from '../input-error.js';
import { COMMON_OPTIONS, type CommandResult, defineCommand } from './command.js';
import { CAUTION_IN_HELP, EXIT_STATUS } from './exit-status.js';
import { type Options, optionsHelp } from './options.js';

const CALIBRATE_OPTIONS = {
  history: {
    kind: 'paths',
    value: 'FILE',
    help: "past element sets, many an object: files or patterns such as 'archive/*.tle' (TLE or OMM, also gzip)",
  },
  out: {
    kind: 'path',
    value: 'CSV',
    help: 'the table for screen --sigma; a report and lists stand beside it',
  },
  'common-error-factor': {
    kind: 'number',
    value: 'F',
    default: 1,
    min: 1,
    max: 100,
    help: 'multiply all sigmas, for errors that all sets of an object share',
  },
} as const satisfies Options;

const HELP = `wideberth calibrate --history FILE --out CSV [options]

Measures how fast the errors of public element sets grow: flies each past set
to the epochs of later ones of the same object, takes the differences in RTN,
leaves out those across maneuvers, and fits robust one-sigmas that grow with
age, for each object that has enough sets and for each class of orbits.

${optionsHelp({ ...CALIBRATE_OPTIONS, ...COMMON_OPTIONS })}

Beside sigma.csv
  sigma.report.txt     how it was done, how much data, bias, how well the fit
                       covers a part of the history that was held back
  sigma.bins.csv       samples, bias, measured and fitted sigma by object,
                       class and age
  sigma.maneuvers.csv  changes of orbit that no pair was formed across
  sigma.inputs.csv     what became of the sets of each file
  sigma.unused.csv     rejected and superseded sets: file, line and reason

Ten million sets take some 300 MB of memory and, while it runs, 2 GB of disk
beside the table.

Differences cannot show errors that both sets share, such as those of SGP4
itself: --common-error-factor is for what you know of them otherwise.

Exit status
  0 done             1 unexpected error
  2 a mistake in the options or the input, output that cannot be written, or a
    history too thin for any row
  130, 143 stopped by SIGINT, SIGTERM: nothing of the run is kept

${CAUTION_IN_HELP}`;

export const calibrateCommand = defineCommand({
  name: 'calibrate',
  summary: 'measure the one-sigma table on past element sets',
  help: HELP,
  options: CALIBRATE_OPTIONS,
  run: async (values, ports): Promise<CommandResult> => {
    if (values.history.length === 0) {
      throw new InputError("no history: give --history FILE, or a pattern such as 'archive/*.tle'");
    }
    if (values.out === undefined) throw new InputError('no place for the table: give --out CSV');
    // Loaded when it is needed: help, and mistakes in the options, are there at once.
    const { streamElementSets } = await import('../elements/read.js');
    const { calibrate } = await import('../jobs/calibrate/calibrate.js');
    const lines = await calibrate(
      {
        historyPaths: values.history,
        outPath: values.out,
        commonErrorFactor: values['common-error-factor'],
      },
      ports,
      (path) => streamElementSets(path),
    );
    return { lines, status: EXIT_STATUS.done };
  },
});
