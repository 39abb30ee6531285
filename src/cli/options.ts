import { closest, distance } from 'fastest-levenshtein';
import { parseUtc } from '../elements/utc.js';
import { InputError } from '../input-error.js';
import type { Vector3 } from '../vector.js';
import { wrap } from './wrap.js';

type Described = {
  /** Stands for the value in the help; a flag has none. */
  readonly value?: string;
  readonly help: string;
  /** The default in words, where it is no fixed value. */
  readonly defaultInWords?: string;
};

type NumberOption = Described & {
  readonly kind: 'number';
  readonly default?: number;
  readonly integer?: true;
  readonly above?: number;
  readonly min?: number;
  readonly max?: number;
};

/** Three numbers above 0 along R, T and N; half-sizes in km unless `of` says otherwise. */
type TripleOption = Described & {
  readonly kind: 'half-sizes';
  readonly of?: { readonly words: string; readonly max: number; readonly unit: string };
};

/**
 * One option, told once: the command line, the configuration file and the help are all derived from it.
 * Values: `flag` boolean; `number` number; `half-sizes` three numbers above 0; `time` milliseconds of UTC
 * since 1970-01-01; `choice` one of `choices`; `path` and `paths` file names.
 */
export type Option =
  | NumberOption
  | (Described & { readonly kind: 'flag' })
  | TripleOption
  | (Described & { readonly kind: 'time' })
  | (Described & { readonly kind: 'choice'; readonly choices: readonly string[]; readonly default?: string })
  | (Described & { readonly kind: 'path' })
  | (Described & { readonly kind: 'paths' });

export type Options = Readonly<Record<string, Option>>;

type ValueOf<O extends Option> = O extends { kind: 'flag' }
  ? boolean
  : O extends { kind: 'number' | 'time' }
    ? number
    : O extends { kind: 'half-sizes' }
      ? Vector3
      : O extends { kind: 'choice'; choices: readonly (infer C)[] }
        ? C
        : O extends { kind: 'path' }
          ? string
          : readonly string[];

/** Checked values by option name; a flag that was not given is `false`, paths that were not given are `[]`. */
export type Values<S extends Options> = {
  readonly [K in keyof S]: S[K] extends { default: unknown } | { kind: 'flag' | 'paths' }
    ? ValueOf<S[K]>
    : ValueOf<S[K]> | undefined;
};

/** A half-size or miss distance beyond this is a slip: it would call half the catalog close. */
export const MAX_HALF_SIZE_KM = 1000;
const HALF_SIZES = { words: 'half-sizes', max: MAX_HALF_SIZE_KM, unit: 'km' };

/** One value as it was given (a time still as text), and the words by which a message points at it: `--days` or `nightly.json, line 4: "days"`. */
export type Given = { readonly value: unknown; readonly origin: string };

export type AllGiven = ReadonlyMap<string, Given>;

/**
 * Reads what yargs found on the command line into plain values; ranges are left to `checkedValues`.
 *
 * @throws InputError for a value that is missing, given twice, or of the wrong kind.
 */
export function givenOnCommandLine(options: Options, parsed: Readonly<Record<string, unknown>>): AllGiven {
  const given = new Map<string, Given>();
  for (const [name, option] of Object.entries(options)) {
    if (!Object.hasOwn(parsed, name) || parsed[name] === undefined) continue;
    const origin = `--${name}`;
    given.set(name, { value: valueFromText(option, parsed[name], origin), origin });
  }
  return given;
}

/**
 * Puts command line, configuration file and defaults together, the command line first, and checks ranges.
 *
 * @throws InputError that names the option, the value and what it may be.
 */
export function checkedValues<S extends Options>(
  options: S,
  commandLine: AllGiven,
  configFile: AllGiven = new Map(),
): Values<S> {
  const values: Record<string, unknown> = {};
  for (const [name, option] of Object.entries(options)) {
    const given = commandLine.get(name) ?? configFile.get(name);
    values[name] = given === undefined ? defaultOf(option) : checked(option, given);
  }
  return values as Values<S>;
}

/** The nearest known name, or `undefined` when none is near enough to be what was meant. */
export function nearestName(name: string, known: readonly string[]): string | undefined {
  if (known.length === 0) return undefined;
  const nearest = closest(name, known);
  return distance(name, nearest) <= Math.max(2, Math.floor(name.length / 3)) ? nearest : undefined;
}

/** The part of the help that lists options, one to an entry, wrapped at `width` columns. */
export function optionsHelp(options: Options, width = 80): string {
  const entries = Object.entries(options).map(([name, option]) => ({
    left: `  --${name}${option.value === undefined ? '' : ` ${option.value}`}`,
    right: option.help + defaultNote(option),
  }));
  const column = Math.max(...entries.map((entry) => entry.left.length)) + 2;
  return entries
    .map(({ left, right }) => {
      const [first, ...rest] = wrap(right, width - column);
      return [left.padEnd(column) + first, ...rest.map((line) => ' '.repeat(column) + line)].join('\n');
    })
    .join('\n');
}

function valueFromText(option: Option, raw: unknown, origin: string): unknown {
  if (option.kind === 'paths') {
    const paths = (Array.isArray(raw) ? raw : [raw]).map(String);
    if (paths.length === 0 || paths.includes(''))
      throw new InputError(`${origin} needs a file name, or - for standard input`);
    return paths;
  }
  if (Array.isArray(raw))
    throw new InputError(`${origin} is given ${raw.length} times (${raw.join(', ')}): give it once`);
  if (option.kind === 'flag') return raw === true;
  const text = String(raw).trim();
  if (text === '') throw new InputError(`${origin} needs a value: ${origin} ${option.value}`);
  switch (option.kind) {
    case 'number':
      return numberFrom(text, origin);
    case 'half-sizes':
      return text.split(',').map((part) => numberFrom(part.trim(), origin));
    default:
      return text;
  }
}

function numberFrom(text: string, origin: string): number {
  // Number() also reads '', hexadecimal and Infinity, which are slips of the pen here.
  if (!/^[+-]?(\d+\.?\d*|\.\d+)(e[+-]?\d+)?$/i.test(text))
    throw new InputError(`${origin} is ${text}, which is not a number`);
  return Number(text);
}

function checked(option: Option, { value, origin }: Given): unknown {
  switch (option.kind) {
    case 'number':
      if (!isWithin(option, value as number)) {
        throw new InputError(`${origin} is ${value}: it must be ${rangeInWords(option)}`);
      }
      return value;
    case 'half-sizes': {
      const sizes = value as readonly number[];
      const { words, max, unit } = option.of ?? HALF_SIZES;
      if (sizes.length !== 3 || !sizes.every((size) => size > 0 && size <= max)) {
        throw new InputError(
          `${origin} is ${sizes.join(',')}: it must be three ${words} R,T,N, each above 0 and at most ${max} ${unit}`,
        );
      }
      return sizes;
    }
    case 'choice':
      if (!option.choices.includes(value as string)) {
        throw new InputError(`${origin} is ${value}: it must be ${option.choices.join(' or ')}`);
      }
      return value;
    case 'time': {
      const ms = parseUtc(value as string);
      if (ms === undefined) {
        throw new InputError(`${origin} is ${value}: it must be a UTC time such as 2026-12-01T00:00:00Z`);
      }
      return ms;
    }
    default:
      return value;
  }
}

function isWithin(option: NumberOption, value: number): boolean {
  return (
    Number.isFinite(value) &&
    (option.integer !== true || Number.isSafeInteger(value)) &&
    (option.above === undefined || value > option.above) &&
    (option.min === undefined || value >= option.min) &&
    (option.max === undefined || value <= option.max)
  );
}

function rangeInWords(option: NumberOption): string {
  const limits = [
    option.above === undefined ? '' : `above ${option.above}`,
    option.min === undefined ? '' : `at least ${option.min}`,
    option.max === undefined ? '' : `at most ${option.max}`,
  ].filter((limit) => limit !== '');
  return [option.integer === true ? 'a whole number' : 'a number', ...limits].join(', ');
}

function defaultOf(option: Option): unknown {
  if (option.kind === 'flag') return false;
  if (option.kind === 'paths') return [];
  return 'default' in option ? option.default : undefined;
}

function defaultNote(option: Option): string {
  const words = option.defaultInWords ?? ('default' in option ? String(option.default) : undefined);
  return words === undefined ? '' : ` (default ${words})`;
}
