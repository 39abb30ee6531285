import yargs from 'yargs';
import { InputError } from '../input-error.js';
import { createLog, mayColor } from '../jobs/log.js';
import { assessCommand } from './assess-command.js';
import { calibrateCommand } from './calibrate-command.js';
import { type Command, reportError } from './command.js';
import { CAUTION_IN_HELP, EXIT_STATUS, EXIT_STATUS_HELP } from './exit-status.js';
import { launchCommand } from './launch-command.js';
import { nearestName } from './options.js';
import { screenCommand } from './screen-command.js';
import type { Surroundings } from './surroundings.js';

/** Every subcommand, in the order of the help. */
const COMMANDS: readonly Command[] = [screenCommand, launchCommand, assessCommand, calibrateCommand];

/**
 * Runs one command line.
 *
 * @param args what follows the name of the program
 * @returns the exit status
 */
export async function runCommandLine(args: readonly string[], surroundings: Surroundings): Promise<number> {
  try {
    return await dispatch(args, surroundings);
  } catch (error) {
    const log = createLog({
      format: /(^| )--log[ =]json( |$)/.test(args.join(' ')) ? 'json' : 'text',
      write: (line) => surroundings.stderr.write(line),
      color: mayColor(surroundings.stderr, surroundings.environment),
      nowMs: surroundings.nowMs,
    });
    return reportError(error, log);
  }
}

async function dispatch(args: readonly string[], surroundings: Surroundings): Promise<number> {
  const command = COMMANDS.find(({ name }) => name === args[0]);
  if (args.includes('--version')) {
    surroundings.stdout.write(`${surroundings.version}\n`);
    return EXIT_STATUS.done;
  }
  if (args.includes('--help') || args.includes('-h')) {
    surroundings.stdout.write(`${command?.help ?? generalHelp()}\n`);
    return EXIT_STATUS.done;
  }
  if (command === undefined) throw new InputError(unknownCommand(args));
  refuseUnknownOptions(command, args);

  let status: number = EXIT_STATUS.unexpected;
  const parser = yargs()
    .scriptName('wideberth')
    .help(false)
    .version(false)
    .exitProcess(false)
    .showHelpOnFail(false)
    .fail((message, error) => {
      throw error ?? new InputError(inOwnWords(message, command.name));
    })
    .parserConfiguration({
      'boolean-negation': false,
      'camel-case-expansion': false,
      'dot-notation': false,
      'duplicate-arguments-array': true,
      'parse-numbers': false,
      'parse-positional-numbers': false,
      'short-option-groups': false,
    });
  for (const each of COMMANDS)
    each.register(parser, surroundings, (outcome) => {
      status = outcome;
    });
  await parser.strict().parseAsync(withBoundDashes(args));
  return status;
}

/** What yargs says of words that no option takes, as this program would say it. */
function inOwnWords(message: string, command: string): string {
  const words = /^Unknown arguments?: (.*)$/s.exec(message)?.[1];
  if (words === undefined) return message;
  return `${words} belongs to no option: name the option before it, see wideberth ${command} --help`;
}

/** yargs takes a lone `-` for a free argument; here it is the value of the option before it: standard input. */
function withBoundDashes(args: readonly string[]): string[] {
  let option = '';
  return args.map((arg) => {
    if (/^--[^=]+$/.test(arg)) option = arg;
    return arg === '-' && option !== '' ? `${option}=-` : arg;
  });
}

function refuseUnknownOptions(command: Command, args: readonly string[]): void {
  const known = Object.keys(command.options);
  for (const arg of args) {
    if (!/^-[^\d.]/.test(arg)) continue;
    const name = arg.replace(/^--?/, '').replace(/=.*$/s, '');
    if (arg.startsWith('--') && known.includes(name)) continue;
    const nearest = nearestName(name, known);
    const advice =
      nearest === undefined ? `see wideberth ${command.name} --help` : `did you mean --${nearest}?`;
    throw new InputError(`unknown option ${arg.replace(/=.*$/s, '')}: ${advice}`);
  }
}

function unknownCommand(args: readonly string[]): string {
  const names = COMMANDS.map(({ name }) => name);
  const word = args[0];
  if (word === undefined || word.startsWith('-'))
    return `name a command first: ${names.join(', ')}; see wideberth --help`;
  const nearest = nearestName(word, names);
  return `unknown command ${word}: ${nearest === undefined ? `there is ${names.join(', ')}` : `did you mean ${nearest}?`}`;
}

function generalHelp(): string {
  return `wideberth screens a satellite constellation for close approaches on public
element sets: it flies every object with SGP4, finds where one of yours passes
close to another, ranks the encounters by collision probability, and writes
tables and CCSDS messages for flight dynamics.

  Every night     wideberth screen --config nightly.json --history runs
  Before launch   wideberth launch --batch batch.tle --catalog catalog.tle \\
                    --liftoff UTC --release UTC --out batch
  To hand over    the folder that --out names: CSV tables, messages, run.json

An example
  wideberth screen --fleet fleet.tle --catalog catalog.tle --days 7 \\
    --miss-km 5 --out tonight
reads element sets (two-line or OMM, plain or gzip), prints the riskiest passes
and leaves conjunctions.csv, unused-elements.csv and run.json in tonight/.

Commands
${COMMANDS.map(({ name, summary }) => `  ${name.padEnd(10)} ${summary}`).join('\n')}
  Options: wideberth COMMAND --help. Version: wideberth --version.

${EXIT_STATUS_HELP}

${CAUTION_IN_HELP}`;
}
