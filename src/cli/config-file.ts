import { readFileSync } from 'node:fs';
import { dirname, isAbsolute, join } from 'node:path';
import { Ajv, type ErrorObject } from 'ajv';
import {
  findNodeAtLocation,
  getNodeValue,
  type Node,
  type ParseError,
  parseTree,
  printParseErrorCode,
} from 'jsonc-parser';
import { InputError } from '../input-error.js';
import { type Given, nearestName, type Option, type Options } from './options.js';

/**
 * Reads a configuration file: JSON with `//` and block comments and trailing commas, one key an option, named as on
 * the command line without the dashes.
 *
 * Relative paths in it count from the folder of the file, not from the working directory: a job started by
 * cron and one started by hand then read and write the same files.
 *
 * @throws InputError that names file, line, key and value.
 */
export function readConfigFile(path: string, options: Options): Map<string, Given> {
  const text = contentsOf(path);
  const errors: ParseError[] = [];
  const root = parseTree(text, errors, { allowTrailingComma: true });
  if (errors.length > 0) {
    const { error, offset } = errors[0];
    throw new InputError(`${at(path, text, offset)}: ${inWords(printParseErrorCode(error))}`);
  }
  if (root === undefined || root.type !== 'object') {
    throw new InputError(`${path}: holds no JSON object, such as { "days": 7 }`);
  }
  refuseRepeatedKeys(path, text, root);
  checkAgainstSchema(path, text, root, options);

  const given = new Map<string, Given>();
  const contents = getNodeValue(root) as Record<string, unknown>;
  for (const [name, option] of Object.entries(options)) {
    if (!Object.hasOwn(contents, name)) continue;
    const key = findNodeAtLocation(root, [name])!.parent!;
    given.set(name, {
      value: withPathsFrom(dirname(path), option, contents[name]),
      origin: `${at(path, text, key.offset)}: "${name}"`,
    });
  }
  return given;
}

/** The JSON Schema (draft 7) of a configuration file with these options. */
export function configSchema(options: Options): object {
  return {
    type: 'object',
    additionalProperties: false,
    properties: Object.fromEntries(
      Object.entries(options).map(([name, option]) => [
        name,
        { ...typeOf(option), description: option.help },
      ]),
    ),
  };
}

function typeOf(option: Option): object {
  const text = { type: 'string', minLength: 1 };
  switch (option.kind) {
    case 'flag':
      return { type: 'boolean' };
    case 'number':
      return { type: option.integer === true ? 'integer' : 'number' };
    case 'half-sizes':
      return { type: 'array', items: { type: 'number' }, minItems: 3, maxItems: 3 };
    case 'choice':
      return { enum: option.choices };
    case 'paths':
      return { anyOf: [text, { type: 'array', items: text, minItems: 1 }] };
    default:
      return text;
  }
}

function valueInWords(option: Option): string {
  switch (option.kind) {
    case 'flag':
      return 'true or false';
    case 'number':
      return option.integer === true ? 'a whole number, without quotes' : 'a number, without quotes';
    case 'half-sizes':
      return `three numbers [R, T, N] in ${option.of?.unit ?? 'km'}`;
    case 'choice':
      return option.choices.map((choice) => `"${choice}"`).join(' or ');
    case 'paths':
      return 'a file name in quotes, or a list of them';
    case 'path':
      return 'a file name in quotes';
    case 'time':
      return 'a UTC time in quotes, such as "2026-12-01T00:00:00Z"';
  }
}

function checkAgainstSchema(path: string, text: string, root: Node, options: Options): void {
  const validate = new Ajv({ allowUnionTypes: true }).compile(configSchema(options));
  if (validate(getNodeValue(root))) return;
  const errors = validate.errors as ErrorObject[];
  const unknown = errors.find((error) => error.keyword === 'additionalProperties');
  if (unknown !== undefined) {
    const name = unknown.params.additionalProperty as string;
    const nearest = nearestName(name, Object.keys(options));
    const advice = nearest === undefined ? 'see --help for the options' : `did you mean "${nearest}"?`;
    throw new InputError(`${at(path, text, keyOffset(root, name))}: unknown key "${name}": ${advice}`);
  }
  const name = errors[0].instancePath.split('/')[1];
  const value = JSON.stringify(getNodeValue(findNodeAtLocation(root, [name])!));
  throw new InputError(
    `${at(path, text, keyOffset(root, name))}: "${name}" is ${value}: it must be ${valueInWords(options[name])}`,
  );
}

function refuseRepeatedKeys(path: string, text: string, root: Node): void {
  const seen = new Set<string>();
  for (const property of root.children ?? []) {
    const name = property.children![0].value as string;
    if (seen.has(name))
      throw new InputError(`${at(path, text, property.offset)}: "${name}" stands here a second time`);
    seen.add(name);
  }
}

function withPathsFrom(folder: string, option: Option, value: unknown): unknown {
  const located = (path: string) => (path === '-' || isAbsolute(path) ? path : join(folder, path));
  if (option.kind === 'path') return located(value as string);
  if (option.kind === 'paths') return [value].flat().map((path) => located(path as string));
  return value;
}

function keyOffset(root: Node, name: string): number {
  return findNodeAtLocation(root, [name])?.parent?.offset ?? 0;
}

function at(path: string, text: string, offset: number): string {
  return `${path}, line ${text.slice(0, offset).split('\n').length}`;
}

/** `PropertyNameExpected` as `property name expected`. */
function inWords(code: string): string {
  return code.replace(/(?<=[a-z])(?=[A-Z])/g, ' ').toLowerCase();
}

function contentsOf(path: string): string {
  try {
    return readFileSync(path, 'utf8').replace(/^\uFEFF/, '');
  } catch (error) {
    throw new InputError(`--config ${path}: cannot be read (${(error as NodeJS.ErrnoException).code})`);
  }
}
