import type { Argv } from 'yargs';
import { InputError } from '../input-error.js';
import { createLog, type Log, mayColor } from '../jobs/log.js';
import { RunLockedError } from '../jobs/run-locked-error.js';
import type { JobPorts } from '../jobs/screen-options.js';
import { EXIT_STATUS } from './exit-status.js';
import {
  type AllGiven,
  checkedValues,
  type Given,
  givenOnCommandLine,
  type Options,
  type Values,
} from './options.js';
import { createProgressLog } from './progress-log.js';
import type { Surroundings } from './surroundings.js';

/** A subcommand, ready to stand in the list of `run-command-line.ts`. */
export type Command = {
  readonly name: string;
  /** One line in the list of commands. */
  readonly summary: string;
  readonly help: string;
  /** Every option it takes on the command line. */
  readonly options: Options;
  /** Adds the command to yargs; `finish` gets the exit status when it has run. */
  readonly register: (yargs: Argv, surroundings: Surroundings, finish: (status: number) => void) => Argv;
};

/** Options that exclude each other: each inner list is one alternative and names the options that belong to it. */
type Alternatives<S extends Options> = ReadonlyArray<readonly (keyof S & string)[]>;

type CommandDefinition<S extends Options> = {
  readonly name: string;
  readonly summary: string;
  /** Everything that `--help` prints. */
  readonly help: string;
  readonly options: S;
  /** Name of the one thing that stands without an option, such as a file to read. */
  readonly argument?: string;
  readonly alternatives?: readonly Alternatives<S>[];
  /** Does the job; a mistake of the user is thrown as InputError. */
  readonly run: (values: Values<S>, ports: JobPorts, argument: string) => Promise<CommandResult>;
};

export type CommandResult = { readonly lines: readonly string[]; readonly status: number };

/** The options of every command; `options.ts` derives the help from them too. */
export const COMMON_OPTIONS = {
  config: { kind: 'path', value: 'FILE', help: 'options from a JSON file; the command line wins' },
  log: {
    kind: 'choice',
    value: 'FORMAT',
    choices: ['text', 'json'],
    default: 'text',
    help: 'log as text or json',
  },
} as const satisfies Options;

/** Makes a command of its definition: parsing, configuration file, log and error reports are the same for all. */
export function defineCommand<const S extends Options>(definition: CommandDefinition<S>): Command {
  const options = { ...definition.options, ...COMMON_OPTIONS };
  return {
    name: definition.name,
    summary: definition.summary,
    help: definition.help,
    options,
    register: (yargs, surroundings, finish) =>
      yargs.command(
        definition.argument === undefined ? definition.name : `${definition.name} [${definition.argument}]`,
        definition.summary,
        (own) => own.options(yargsOptions(options)),
        async (parsed) => finish(await runCommand(definition, parsed, surroundings)),
      ),
  };
}

async function runCommand<S extends Options>(
  definition: CommandDefinition<S>,
  parsed: Readonly<Record<string, unknown>>,
  surroundings: Surroundings,
): Promise<number> {
  const optionsOfFile = { ...definition.options, log: COMMON_OPTIONS.log };
  const commandLine = givenOnCommandLine({ ...optionsOfFile, config: COMMON_OPTIONS.config }, parsed);
  const configPath = commandLine.get('config')?.value as string | undefined;
  // What not every run needs is loaded by those that do: it takes longer than reading the options.
  const configFile =
    configPath === undefined
      ? new Map<string, Given>()
      : (await import('./config-file.js')).readConfigFile(configPath, optionsOfFile);
  const common = checkedValues({ log: COMMON_OPTIONS.log }, commandLine, configFile);

  const { stderr } = surroundings;
  const bar =
    common.log === 'text' && stderr.isTTY === true
      ? (await import('./progress-bar.js')).createProgressBar(stderr as unknown as NodeJS.WritableStream)
      : undefined;
  const log = createLog({
    format: common.log,
    write: (line) => {
      bar?.clear();
      stderr.write(line);
    },
    color: mayColor(stderr, surroundings.environment),
    nowMs: surroundings.nowMs,
  });
  const listener = surroundings.listenForStop(log);
  try {
    const notes = decideAlternatives(definition.alternatives ?? [], commandLine, configFile);
    const values = checkedValues(definition.options, commandLine, configFile);
    for (const note of notes) log.info(note);
    const ports: JobPorts = {
      log,
      progress: bar?.show ?? createProgressLog(log, () => performance.now()),
      onStop: listener.onStop,
      nowMs: surroundings.nowMs,
      version: surroundings.version,
    };
    const result = await definition.run(values, ports, argumentOf(definition, parsed));
    bar?.clear();
    for (const line of result.lines) surroundings.stdout.write(`${line}\n`);
    return result.status;
  } catch (error) {
    bar?.clear();
    return reportError(error, log);
  } finally {
    listener.close();
  }
}

function argumentOf<S extends Options>(
  { name, argument }: CommandDefinition<S>,
  parsed: Readonly<Record<string, unknown>>,
): string {
  if (argument === undefined) return '';
  const value = parsed[argument];
  if (value === undefined || value === '') throw new InputError(`name a ${argument}: wideberth ${name} FILE`);
  return String(value);
}

/** Says in the log what went wrong, and which exit status that is. */
export function reportError(error: unknown, log: Log): number {
  if (error instanceof InputError) {
    log.error(error.message);
    return EXIT_STATUS.input;
  }
  if (error instanceof RunLockedError) {
    log.error(error.message);
    return EXIT_STATUS.locked;
  }
  log.error('unexpected error', { err: error });
  log.error('this is a fault of wideberth: please report it with the lines above and the command line');
  return EXIT_STATUS.unexpected;
}

/**
 * Takes from the configuration file what the command line replaces by an alternative, so that a nightly
 * file can be used for a variation, and refuses alternatives given side by side.
 *
 * @returns what the log should say about it
 */
function decideAlternatives<S extends Options>(
  alternatives: readonly Alternatives<S>[],
  commandLine: AllGiven,
  configFile: Map<string, Given>,
): string[] {
  const notes: string[] = [];
  const isGiven = (given: AllGiven, name: string) => given.has(name) && given.get(name)!.value !== false;
  for (const group of alternatives) {
    const chosen = group.filter((names) => names.some((name) => isGiven(commandLine, name)));
    for (const names of chosen.length === 0 ? [] : group.filter((other) => !chosen.includes(other))) {
      for (const name of names.filter((each) => isGiven(configFile, each))) {
        notes.push(
          `${configFile.get(name)!.origin} gives way to --${chosen[0].find((each) => isGiven(commandLine, each))}`,
        );
        configFile.delete(name);
      }
    }
    const given = group.flatMap((names) => {
      const first = names.find((name) => isGiven(commandLine, name) || isGiven(configFile, name));
      return first === undefined ? [] : [commandLine.get(first)?.origin ?? configFile.get(first)!.origin];
    });
    if (given.length > 1) throw new InputError(`${given.join(' and ')} exclude each other: give one of them`);
  }
  return notes;
}

function yargsOptions(
  options: Options,
): Record<string, { type: 'array' | 'boolean' | 'string'; string?: true }> {
  return Object.fromEntries(
    Object.entries(options).map(([name, option]) => {
      if (option.kind === 'paths') return [name, { type: 'array', string: true }];
      return [name, { type: option.kind === 'flag' ? 'boolean' : 'string' }];
    }),
  );
}
