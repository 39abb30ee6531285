import {
  chmodSync,
  existsSync,
  mkdirSync,
  mkdtempSync,
  readdirSync,
  readFileSync,
  rmSync,
  statSync,
  symlinkSync,
  writeFileSync,
} from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import { InputError } from '../../src/input-error.js';
import { openOutputFolder } from '../../src/jobs/output-folder.js';
import { RunLockedError } from '../../src/jobs/run-locked-error.js';
import { nightIn, writeNight } from './nights.js';
import { silentPorts } from './silent-ports.js';

let folder = '';
let out = '';
beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), 'wideberth-output-'));
  out = join(folder, 'tonight');
});
afterEach(() => rmSync(folder, { recursive: true }));

async function publishNight(night: string, ports = silentPorts()): Promise<void> {
  const output = await openOutputFolder(out, ports);
  try {
    writeNight(output, night);
    output.publish();
  } finally {
    output.close();
  }
}

describe('publishing', () => {
  test('makes a folder that is not there, with its parents', async () => {
    out = join(folder, 'deep', 'er', 'tonight');
    await publishNight('one');
    expect(nightIn(out)).toBe('one');
    expect(readdirSync(join(folder, 'deep', 'er'))).toEqual(['tonight']);
  });

  test('replaces the run before as a whole and leaves nothing beside it', async () => {
    await publishNight('one');
    chmodSync(out, 0o750);
    await publishNight('two');
    expect(nightIn(out)).toBe('two');
    expect(readdirSync(folder)).toEqual(['tonight']);
    expect(statSync(out).mode & 0o777).toBe(0o750);
  });

  test('fills an empty folder', async () => {
    mkdirSync(out);
    await publishNight('one');
    expect(nightIn(out)).toBe('one');
  });

  test('works through a symbolic link, which stays, and locks what it points at', async () => {
    mkdirSync(join(folder, 'disk'));
    symlinkSync(join(folder, 'disk'), out);
    await publishNight('one');
    await publishNight('two');
    expect(nightIn(join(folder, 'disk'))).toBe('two');
    expect(readFileSync(join(out, 'unused-elements.csv'), 'utf8')).toBe('two');
    const direct = await openOutputFolder(join(folder, 'disk'), silentPorts());
    await expect(openOutputFolder(out, silentPorts())).rejects.toThrow(RunLockedError);
    direct.close();
  });

  test('keeps files of others, also those beside files of a run', async () => {
    await publishNight('one');
    writeFileSync(join(out, 'notes.txt'), 'called the other operator');
    writeFileSync(join(out, 'cdm', 'sent.txt'), 'yes');
    mkdirSync(join(out, 'plots'));
    writeFileSync(join(out, 'plots', 'a.png'), 'png');
    const foreign = ['notes.txt', 'cdm/sent.txt', 'plots', 'plots/a.png'];
    const ports = silentPorts();
    await publishNight('two', ports);
    expect(nightIn(out, foreign)).toBe('two');
    expect(readFileSync(join(out, 'notes.txt'), 'utf8')).toBe('called the other operator');
    expect(readFileSync(join(out, 'plots', 'a.png'), 'utf8')).toBe('png');
    expect(ports.messages.map((message) => message.replaceAll(folder, ''))).toEqual([
      'kept /tonight/cdm/sent.txt, which wideberth did not write',
      'kept /tonight/notes.txt, which wideberth did not write',
      'kept /tonight/plots, which wideberth did not write',
    ]);
  });

  test('refuses a name that a file of others has taken, and keeps the new run elsewhere', async () => {
    await publishNight('one');
    writeFileSync(join(out, 'cdm', 'two.kvn'), 'mine');
    const ports = silentPorts();
    await expect(publishNight('two', ports)).rejects.toThrow(/cdm\/two\.kvn stands in the way/);
    expect(nightIn(out, ['cdm/two.kvn'])).toBe('one');
    expect(nightIn(join(folder, 'tonight.unpublished'))).toBe('two');
    expect(ports.messages).toEqual([`the results of this run are in ${out}.unpublished`]);
    expect(readdirSync(folder)).toEqual(['tonight', 'tonight.unpublished']);
  });

  test('takes files as streams too, and lists them only when they are whole', async () => {
    const output = await openOutputFolder(out, silentPorts());
    const stream = output.stream('conjunctions.csv');
    stream.write('one\n');
    expect(() => output.seal(() => '')).toThrow('conjunctions.csv not finished before run.json');
    await new Promise<void>((resolve) => stream.end('two\n', resolve));
    output.write('a.csv', 'ä');
    let listed: unknown;
    output.seal((files) => {
      listed = files;
      return JSON.stringify({ program: 'wideberth', files });
    });
    output.publish();
    output.close();
    expect(readFileSync(join(out, 'conjunctions.csv'), 'utf8')).toBe('one\ntwo\n');
    // printf 'ä' | sha256sum; printf 'one\ntwo\n' | sha256sum
    expect(listed).toEqual([
      { name: 'a.csv', bytes: 2, sha256: '33e6d73fee82904c8d7afb78de1154d1e8dc2a0edb08120e63df5b9385c2d9cc' },
      {
        name: 'conjunctions.csv',
        bytes: 8,
        sha256: 'c3f9c8c283a2b1f2f1896f27a01cbe3cddc0c9d93f752e4639035a0f5b36f6e8',
      },
    ]);
  });

  test('refuses a file after the record, and a run without one', async () => {
    const output = await openOutputFolder(out, silentPorts());
    expect(() => output.publish()).toThrow('nothing is published before it is sealed');
    writeNight(output, 'one');
    expect(() => output.write('late.csv', '')).toThrow('late.csv comes after run.json');
    output.close();
    expect(readdirSync(folder)).toEqual([]);
  });
});

describe('closing without publishing', () => {
  test('leaves the run before, no lock and nothing unfinished', async () => {
    await publishNight('one');
    const ports = silentPorts();
    const output = await openOutputFolder(out, ports);
    writeNight(output, 'two');
    expect(readdirSync(folder)).toEqual(['.tonight.partial', 'tonight', 'tonight.lock']);
    for (const undo of ports.undos) undo();
    expect(nightIn(out)).toBe('one');
    expect(readdirSync(folder)).toEqual(['tonight']);
    output.close();
  });
});

describe('a place that cannot be used is refused before any work', () => {
  const refused = async (message: RegExp) => {
    const opened = openOutputFolder(out, silentPorts());
    await expect(opened).rejects.toThrow(InputError);
    await expect(opened).rejects.toThrow(message);
    expect(existsSync(`${out}.lock`)).toBe(false);
  };

  test('a file', async () => {
    writeFileSync(out, '');
    await refused(/which is a file: name a folder$/);
  });

  test('a folder below a file', async () => {
    writeFileSync(join(folder, 'file'), '');
    out = join(folder, 'file', 'tonight');
    await refused(/a part of the path is a file.*\((ENOTDIR|EEXIST)\)/);
  });

  test('a folder with files of others only', async () => {
    mkdirSync(out);
    writeFileSync(join(out, 'thesis.tex'), 'all my work');
    await refused(/holds files but no run\.json of wideberth/);
    expect(readdirSync(out)).toEqual(['thesis.tex']);
  });

  test.each([
    '{"program":"other","files":[]}',
    '{"program":"wideberth"}',
    '{"program":"wideberth","files":[null]}',
    'null',
    '{',
  ])('a folder whose run.json is %s', async (text) => {
    mkdirSync(out);
    writeFileSync(join(out, 'run.json'), text);
    await refused(/no run\.json of wideberth/);
  });

  test('the root', async () => {
    await expect(openOutputFolder('/', silentPorts())).rejects.toThrow('--out is /: name a folder below it');
  });
});
