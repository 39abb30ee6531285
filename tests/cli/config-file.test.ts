import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import { COMMON_OPTIONS } from '../../src/cli/command.js';
import { configSchema, readConfigFile } from '../../src/cli/config-file.js';
import { checkedValues, type Options } from '../../src/cli/options.js';
import { SCREEN_OPTIONS } from '../../src/cli/screen-command.js';
import { InputError } from '../../src/input-error.js';

let folder = '';
beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), 'wideberth-config-'));
});
afterEach(() => rmSync(folder, { recursive: true }));

function read(text: string, options: Options = SCREEN_OPTIONS) {
  const path = join(folder, 'nightly.json');
  writeFileSync(path, text);
  return readConfigFile(path, options);
}

const messageOf = (text: string): string => {
  try {
    read(text);
  } catch (error) {
    expect(error).toBeInstanceOf(InputError);
    return (error as Error).message.replaceAll(`${folder}/`, '');
  }
  return 'no error';
};

describe('a configuration file', () => {
  test('may hold comments and a trailing comma; its relative paths count from its folder', () => {
    const given = read(`// nightly
      {
        "fleet": ["fleet.tle", "-", "/data/own.tle"], /* two files and standard input */
        "catalog": "../catalog.tle.gz",
        "days": 3,
        "within-fleet": true,
        "volume-rtn-km": [0.4, 25, 25],
        "start": "2026-12-01T00:00:00Z",
      }`);
    const values = checkedValues(SCREEN_OPTIONS, new Map(), given);
    expect(values.fleet).toEqual([join(folder, 'fleet.tle'), '-', '/data/own.tle']);
    expect(values.catalog).toEqual([join(folder, '../catalog.tle.gz')]);
    expect([values.days, values['within-fleet']]).toEqual([3, true]);
    expect(values['volume-rtn-km']).toEqual([0.4, 25, 25]);
    expect(values.start).toBe(Date.UTC(2026, 11, 1));
  });

  test.each([
    ['{\n  "mis-km": 5\n}', 'nightly.json, line 2: unknown key "mis-km": did you mean "miss-km"?'],
    ['{\n  "frobnicate": 5\n}', 'nightly.json, line 2: unknown key "frobnicate": see --help for the options'],
    ['{\n\n  "days": "7"\n}', 'nightly.json, line 3: "days" is "7": it must be a number, without quotes'],
    ['{ "top": 1.5 }', 'nightly.json, line 1: "top" is 1.5: it must be a whole number, without quotes'],
    ['{ "within-fleet": "yes" }', 'nightly.json, line 1: "within-fleet" is "yes": it must be true or false'],
    [
      '{ "fleet": [] }',
      'nightly.json, line 1: "fleet" is []: it must be a file name in quotes, or a list of them',
    ],
    ['{ "out": 5 }', 'nightly.json, line 1: "out" is 5: it must be a file name in quotes'],
    [
      '{ "volume-shape": "ball" }',
      'nightly.json, line 1: "volume-shape" is "ball": it must be "BOX" or "ELLIPSOID"',
    ],
    [
      '{ "volume-rtn-km": [1, 2] }',
      'nightly.json, line 1: "volume-rtn-km" is [1,2]: it must be three numbers [R, T, N] in km',
    ],
    ['{ "days": 1,\n "days": 2 }', 'nightly.json, line 2: "days" stands here a second time'],
    ['{\n "days" 1 }', 'nightly.json, line 2: colon expected'],
    ['{ "days": 1 ', 'nightly.json, line 1: close brace expected'],
    ['[]', 'nightly.json: holds no JSON object, such as { "days": 7 }'],
    ['', 'nightly.json, line 1: value expected'],
  ])('is refused with file, line and remedy: %j', (text, message) => {
    expect(messageOf(text)).toBe(message);
  });

  test('with a value out of range is refused by file and line too', () => {
    const given = read('{\n  "days": -1\n}');
    expect(() => checkedValues(SCREEN_OPTIONS, new Map(), given)).toThrow(
      /nightly\.json, line 2: "days" is -1: it must be a number, above 0, at most 60$/,
    );
  });

  test('that is not there is an InputError', () => {
    expect(() => readConfigFile(join(folder, 'none.json'), SCREEN_OPTIONS)).toThrow(
      /none\.json: cannot be read \(ENOENT\)/,
    );
  });
});

test('the schema knows every option by its kind', () => {
  const { properties } = configSchema(SCREEN_OPTIONS) as { properties: Record<string, object> };
  expect(Object.keys(properties)).toEqual(Object.keys(SCREEN_OPTIONS));
  expect(properties['keep-runs']).toMatchObject({ type: 'integer' });
});

test('the example in the sample catalogs is a valid file', () => {
  const given = readConfigFile('sample-catalogs/nightly.json', {
    ...SCREEN_OPTIONS,
    log: COMMON_OPTIONS.log,
  });
  const values = checkedValues(SCREEN_OPTIONS, new Map(), given);
  expect(values.fleet).toEqual([join('sample-catalogs', 'fleet.tle')]);
  expect(values['alert-pc']).toBe(1e-4);
});
