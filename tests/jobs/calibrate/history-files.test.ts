import { mkdirSync, writeFileSync } from 'node:fs';
import { join, relative } from 'node:path';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { InputError } from '../../../src/input-error.js';
import { historyFiles } from '../../../src/jobs/calibrate/history-files.js';
import { newFolder, removeFolders } from './run-calibration.js';

let folder: string;

beforeAll(() => {
  folder = newFolder();
  mkdirSync(join(folder, 'deep', 'er'), { recursive: true });
  for (const name of ['b.tle', 'a.tle', 'notes.txt', 'odd[1].tle', 'deep/c.tle', 'deep/er/d.tle']) {
    writeFileSync(join(folder, name), '');
  }
});

afterAll(removeFolders);

function inFolder(...names: string[]): string[] {
  return names.map((name) => join(folder, name));
}

describe('history files', () => {
  test('patterns, ordered by path; ** goes into folders', async () => {
    expect(await historyFiles(inFolder('*.tle'))).toEqual(inFolder('a.tle', 'b.tle', 'odd[1].tle'));
    expect(await historyFiles(inFolder('**/*.tle'))).toEqual(
      inFolder('a.tle', 'b.tle', 'deep/c.tle', 'deep/er/d.tle', 'odd[1].tle'),
    );
  });

  test('each file once, however often and in whatever way it is named', async () => {
    const relativeName = relative(process.cwd(), join(folder, 'a.tle'));
    const named = [...inFolder('b.tle', 'a.tle', '*.tle', './deep/../b.tle'), relativeName];
    const found = await historyFiles(named);
    expect(found).toHaveLength(3);
    expect(await historyFiles(named.reverse())).toEqual(found);
  });

  test('a file whose name looks like a pattern is that file', async () => {
    expect(await historyFiles(inFolder('odd[1].tle'))).toEqual(inFolder('odd[1].tle'));
  });

  test('standard input is passed on', async () => {
    expect(await historyFiles(['-', ...inFolder('a.tle')])).toEqual(['-', ...inFolder('a.tle')]);
  });

  test.each([
    ['*.omm', /--history .*\*\.omm: there is no such file, and none matches it as a pattern/],
    ['c.tle', /--history .*c\.tle: there is no such file/],
    ['deep', /--history .*deep is a folder: name its files, for instance '.*deep\/\*\.tle'/],
  ])('%s is refused', async (name, message) => {
    await expect(historyFiles(inFolder('a.tle', name))).rejects.toThrow(message);
    await expect(historyFiles(inFolder('a.tle', name))).rejects.toBeInstanceOf(InputError);
  });
});
