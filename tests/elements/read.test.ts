import { execFileSync } from 'node:child_process';
import { createHash } from 'node:crypto';
import { mkdirSync, readdirSync, symlinkSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { gzipSync } from 'node:zlib';
import { describe, expect, it } from 'vitest';
import { isUnused, type SetOrRejection } from '../../src/elements/decoder.js';
import { readElementFiles, streamElementSets } from '../../src/elements/read.js';
import { InputError } from '../../src/input-error.js';
import { toTwoLine } from '../synthetic/two-line.js';
import {
  elementsOf,
  inFolder,
  inventedSet,
  inventedSets,
  jsonFile,
  kvnFile,
  readText,
  threeLineFile,
  twoLineFile,
  xmlFile,
} from './formats.js';

const SETS = inventedSets(20);
const TEXT = threeLineFile(SETS);

/** The message of the InputError that reading a file of this content must end in. */
async function complaint(content: string | Uint8Array): Promise<string> {
  return inFolder({ 'night.tle': content }, async (path) => {
    const error = await readElementFiles([path('night.tle')]).then(
      () => undefined,
      (reason: unknown) => reason,
    );
    expect(error).toBeInstanceOf(InputError);
    const { message } = error as InputError;
    expect(message).not.toContain('\n');
    expect(message.startsWith(path('night.tle'))).toBe(true);
    return message.slice(path('night.tle').length + 1);
  });
}

describe('what a file may be', () => {
  it.each<[string, Uint8Array]>([
    ['gzip whatever its name', gzipSync(TEXT)],
    ['several gzip members', Buffer.concat([gzipSync(TEXT.slice(0, 700)), gzipSync(TEXT.slice(700))])],
    ['UTF-8 with a byte-order mark', Buffer.from(`\uFEFF${TEXT}`)],
    ['UTF-16 little-endian', Buffer.from(`\uFEFF${TEXT}`, 'utf16le')],
    ['UTF-16 big-endian', Buffer.from(`\uFEFF${TEXT}`, 'utf16le').swap16()],
    ['gzip of UTF-16', gzipSync(Buffer.from(`\uFEFF${TEXT}`, 'utf16le'))],
    ['without a line end at the end', Buffer.from(TEXT.trimEnd())],
    ['comments longer than a chunk first', Buffer.from(`${'# about nothing\n'.repeat(40_000)}${TEXT}`)],
  ])('%s', async (_, content) => {
    const { sets, rejected, files } = await readText(content);
    expect(rejected).toEqual([]);
    expect(sets.map(elementsOf)).toEqual(SETS.map(elementsOf));
    expect(files).toEqual([
      {
        file: sets[0].source.file,
        sha256: createHash('sha256').update(content).digest('hex'),
        read: 20,
        rejected: 0,
      },
    ]);
  });

  it('several files keep their order and their counts', async () => {
    const files = {
      a: xmlFile(SETS.slice(0, 3)),
      b: TEXT.replace('9990\n', '9991\n'),
      c: kvnFile(SETS.slice(5, 6)),
    };
    await inFolder(files, async (path) => {
      const paths = ['c', 'a', 'b'].map(path);
      const { sets, rejected, files: counts } = await readElementFiles(paths);
      expect(counts.map(({ file, read, rejected: faulty }) => [file, read, faulty])).toEqual([
        [paths[0], 1, 0],
        [paths[1], 3, 0],
        [paths[2], 20, rejected.length],
      ]);
      expect(sets.slice(0, 4).map((set) => set.name)).toEqual([
        'KESTREL-6',
        'KESTREL-1',
        'KESTREL-2',
        'KESTREL-3',
      ]);
    });
  });

  it('standard input is "-"', () => {
    const script = `
      import { readElementFiles } from './src/elements/read.ts';
      const { sets, files } = await readElementFiles(['-']);
      console.log(JSON.stringify([sets.length, sets[0].source.file, files]));`;
    const output = execFileSync(process.execPath, ['--import', 'tsx', '--input-type=module', '-e', script], {
      cwd: fileURLToPath(new URL('../..', import.meta.url)),
      input: gzipSync(TEXT),
    });
    const sha256 = createHash('sha256').update(gzipSync(TEXT)).digest('hex');
    expect(JSON.parse(String(output))).toEqual([20, '-', [{ file: '-', sha256, read: 20, rejected: 0 }]]);
  });
});

describe('what stops a run', () => {
  const gzip = gzipSync(twoLineFile(inventedSets(2000)));
  const flipped = Buffer.from(gzip);
  flipped[flipped.length >> 1] ^= 0x40;

  it.each<[string, string | Uint8Array, string | RegExp]>([
    ['an empty file', '', 'is empty: give two-line sets or OMM in JSON, CSV, XML or KVN'],
    ['nothing but comments', '# a\n\n  \n#b', /^holds only blank lines and comments: give two-line sets/],
    ['an empty array', '[]', /^holds no element set: give/],
    [
      'binary data',
      Buffer.from('1 99001\0'),
      /^holds binary data \(a zero byte\), not element sets: give a text file/,
    ],
    ['UTF-16 without a mark', Buffer.from(TEXT, 'utf16le'), /^holds binary data/],
    [
      'a web page',
      '\n<!DOCTYPE html>\n<html><p>gone</p>\n',
      /^is a web page, not element sets: fetch two-line sets/,
    ],
    ['another web page', '<html lang="en">', /^is a web page/],
    [
      'gzip cut off',
      gzip.subarray(0, gzip.length - 200),
      'is a damaged gzip file (unexpected end of file): fetch it again',
    ],
    ['gzip changed', flipped, /^is a damaged gzip file \(.+\): fetch it again$/],
    [
      'gzip with more behind it',
      Buffer.concat([gzip, Buffer.alloc(9)]),
      'is a damaged gzip file (9 bytes follow its end): fetch it again',
    ],
    [
      'prose',
      'Dear all,\nno sets today.\n'.repeat(5000),
      /^holds no usable element set \(1 record rejected at line 1: "Dear all.*10000 lines that are not part of an element set\): give/,
    ],
    [
      'faulty sets only',
      `# x\n${TEXT.replaceAll('\n1 ', '\n8 ')}`,
      /^holds no usable element set \(all 20 records rejected, the first at line 2: line 2 without a line 1/,
    ],
    [
      'faulty records only',
      `[{"NORAD_CAT_ID": 99001}, {}]`,
      /^holds no usable element set \(all 2 records rejected, the first at record 1: EPOCH is missing\)/,
    ],
  ])('%s', async (_, content, message) => {
    const said = await complaint(content);
    if (typeof message === 'string') expect(said).toBe(message);
    else expect(said).toMatch(message);
  });

  it('a path that cannot be read', async () => {
    await inFolder({ file: TEXT }, async (path) => {
      mkdirSync(path('folder'));
      symlinkSync(path('loop'), path('loop'));
      const cases: [string, string][] = [
        [path('missing'), 'does not exist: check the path'],
        [path('folder'), 'is a directory: name the element-set files in it'],
        [path('file/x'), 'does not exist: a part of its path is a file, not a directory'],
        [path('loop'), 'cannot be read: its symbolic links go in a circle'],
        [path('x'.repeat(300)), 'does not exist: the path is too long'],
      ];
      for (const [file, message] of cases) {
        await expect(readElementFiles([file])).rejects.toThrow(new InputError(`${file} ${message}`));
      }
    });
  });

  it('a file named twice', async () => {
    await expect(readElementFiles(['a', '-', 'b', '-'])).rejects.toThrow(
      new InputError('standard input is named twice: name each file once'),
    );
  });
});

describe('streaming', () => {
  async function collect(path: string): Promise<SetOrRejection[]> {
    const records: SetOrRejection[] = [];
    for await (const record of streamElementSets(path)) records.push(record);
    return records;
  }

  it.each([
    ['two-line', 4000, twoLineFile],
    ['JSON', 1200, jsonFile],
    ['XML', 600, xmlFile],
  ] as const)(
    '%s gives the records of the whole file in its order, chunk borders anywhere',
    async (_, count, write) => {
      const sets = inventedSets(count);
      const damaged = write(sets).replaceAll(/99(\d)01/g, '99$1X1');
      await inFolder({ file: damaged }, async (path) => {
        const whole = await readElementFiles([path('file')]);
        const records = await collect(path('file'));
        expect(records.filter((record) => !isUnused(record))).toEqual(whole.sets);
        expect(records.filter(isUnused)).toEqual(whole.rejected);
        expect(records.length).toBe(count);
        expect(whole.rejected.length).toBeGreaterThan(3);
      });
    },
  );

  it('tells at the end that nothing was usable', async () => {
    await inFolder({ file: 'prose\n' }, async (path) => {
      const records = streamElementSets(path('file'));
      expect((await records.next()).value).toMatchObject({ reason: 'rejected' });
      await expect(records.next()).rejects.toThrow(InputError);
    });
  });

  it('closes the file when the reader stops early', async () => {
    const text = twoLineFile(inventedSets(5000));
    await inFolder({ plain: text, packed: gzipSync(text) }, async (path) => {
      const open = () => readdirSync('/proc/self/fd').length;
      const before = open();
      for (let i = 0; i < 6; i++) {
        for await (const _ of streamElementSets(path(i % 2 === 0 ? 'plain' : 'packed'))) break;
      }
      await expect.poll(open).toBeLessThanOrEqual(before + 1);
    });
  });
});

it('reads a whole catalog of 26 000 sets in well under a second of processor time', async () => {
  const [one, two] = toTwoLine(inventedSet());
  const text = `${one}\n${two}\n`.repeat(26_000);
  await inFolder({ file: text }, async (path) => {
    await readElementFiles([path('file')]);
    const before = process.cpuUsage();
    const { sets } = await readElementFiles([path('file')]);
    expect(sets.length).toBe(26_000);
    expect(process.cpuUsage(before).user / 1e6).toBeLessThan(2);
  });
});
