import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, describe, expect, it } from 'vitest';
import type { ElementSet } from '../../../src/elements/element-set.js';
import { InputError } from '../../../src/input-error.js';
import { expectBatchNear, objectNamed, readBatch } from '../../../src/jobs/launch/read-batch.js';
import { toTwoLine } from '../../synthetic/two-line.js';
import { batchSet, RELEASE_MS } from './batch-sets.js';

const folder = mkdtempSync(join(tmpdir(), 'wideberth-batch-'));
afterAll(() => rmSync(folder, { recursive: true }));

type Given = readonly [name: string, number: string, changes?: Partial<ElementSet>];

/** Writes sets of two or three lines; the number may be blank. */
function fileOf(name: string, sets: readonly Given[]): string {
  const text = sets.map(([title, number, changes]) => {
    const [one, two] = toTwoLine({ ...batchSet('B-X', changes).set, designator: '70001' });
    // A digit less or more in columns 3 to 7 changes the checksum.
    const renumbered = [one, two].map((line) => {
      const body = line.slice(0, 2) + number.padStart(5) + line.slice(7, 68);
      return body + String([...body].reduce((sum, c) => sum + (c === '-' ? 1 : Number(c) || 0), 0) % 10);
    });
    return [...(title === '' ? [] : [title]), ...renumbered, ''].join('\n');
  });
  const path = join(folder, name);
  writeFileSync(path, text.join(''));
  return path;
}

const designators = async (...paths: string[]) =>
  (await readBatch(paths)).sets.map(({ set }) => set.designator);

describe('designators of the batch', () => {
  it('come from names, whatever the numbers are', async () => {
    const path = fileOf('numbers.tle', [
      ['SAT 1', '00000'],
      ['SAT 2', '     '],
      ['SAT 3', '90005'],
      ['SAT 4', '90005'],
      ['SAT 5', 'A0001'],
    ]);
    const { sets, files } = await readBatch([path]);
    expect(sets.map(({ set }) => set.designator)).toEqual([
      'B-SAT-1',
      'B-SAT-2',
      'B-SAT-3',
      'B-SAT-4',
      'B-SAT-5',
    ]);
    expect(sets.map(({ numberInFile }) => numberInFile)).toEqual(['', '', '90005', '90005', '100001']);
    expect(files).toMatchObject([{ read: 5, used: 5, superseded: 0, rejected: 0 }]);
  });

  it('come from the place without names, and twice the same set stays two objects', async () => {
    const path = fileOf('places.tle', [
      ['', '00000'],
      ['', '00000'],
      ['- -', '90005'],
    ]);
    expect(await designators(path)).toEqual(['B-#1', 'B-#2', 'B-#3']);
  });

  it('of a place stay when a damaged set before it is mended', async () => {
    const damaged = fileOf('damaged.tle', [
      ['', '00000', { inclinationDeg: 10 }],
      ['', '00000'],
    ]);
    writeFileSync(damaged, readFileSync(damaged, 'utf8').replace(' 10.0000 ', ' 11.0000 '));
    const { sets, rejected } = await readBatch([damaged]);
    expect(rejected).toHaveLength(1);
    expect(sets.map(({ set }) => set.designator)).toEqual(['B-#2']);
  });

  it('of a name do not change with other sets', async () => {
    const some = fileOf('some.tle', [['SAT 2', '00000']]);
    const more = fileOf('more.tle', [
      ['SAT 1', '00000'],
      ['', '00000'],
      ['SAT 2', '00000'],
    ]);
    expect(await designators(some)).toEqual(['B-SAT-2']);
    expect(await designators(more)).toEqual(['B-SAT-1', 'B-#2', 'B-SAT-2']);
  });

  it('tell apart what has one name, and say so', async () => {
    const path = fileOf('names.tle', [
      ['SAT 1', '00000'],
      ['SAT-1', '00000'],
      ['sat 1', '00000'],
    ]);
    const { sets, warnings } = await readBatch([path]);
    expect(sets.map(({ set }) => set.designator)).toEqual(['B-SAT-1', 'B-SAT-1.2', 'B-SAT-1.3']);
    expect(warnings).toHaveLength(2);
    expect(warnings[0]).toBe(
      `${path}:4: the name "SAT-1" is that of line 1 too: screened as an object of its own, B-SAT-1.2; name them apart if you can`,
    );
  });

  it('are the same for one name in two files, and a set without one is refused there', async () => {
    const low = fileOf('low.tle', [['SAT 1', '00000']]);
    const high = fileOf('high.tle', [['SAT 1', '90005']]);
    expect(await designators(low, high)).toEqual(['B-SAT-1', 'B-SAT-1']);
    const unnamed = fileOf('unnamed.tle', [['', '00000']]);
    await expect(readBatch([low, unnamed])).rejects.toThrow(
      new InputError(
        `${unnamed}:1: a set without a name, but --batch names several files, whose objects are matched by name: give every set a name line`,
      ),
    );
  });
});

describe('an object named in a table', () => {
  const sets = [
    batchSet('B-SAT-1'),
    batchSet('B-SAT-2', { name: 'SAT 2' }),
    batchSet('B-SAT-2.2', { name: 'SAT 2' }),
  ];

  it('is found by name in any spelling, or by designator', () => {
    expect(objectNamed('sat 1', sets, 'x.csv:2')).toBe(sets[0]);
    expect(objectNamed('B-SAT-1', sets, 'x.csv:2')).toBe(sets[0]);
    expect(objectNamed('B-SAT-2.2', sets, 'x.csv:2')).toBe(sets[2]);
  });

  it.each([
    ['SAT 3', 'x.csv:2: "SAT 3" is neither name nor designator of a set of the batch: check the spelling'],
    ['', 'x.csv:2: "" is neither name nor designator of a set of the batch: check the spelling'],
    ['SAT 2', 'x.csv:2: "SAT 2" is the name of 2 sets: give a designator, B-SAT-2 or B-SAT-2.2'],
  ])('is refused as %j', (object, message) => {
    expect(() => objectNamed(object, sets, 'x.csv:2')).toThrow(new InputError(message));
  });
});

describe('the epochs of the batch', () => {
  const { set } = batchSet('B-A', { epochMs: RELEASE_MS + 86_400_000 });

  it('may lie after release', () => {
    expect(() => expectBatchNear([{ set, validFromMs: RELEASE_MS }], 30)).not.toThrow();
  });

  it('must not lie far from it', () => {
    expect(() => expectBatchNear([{ set, validFromMs: RELEASE_MS - 40 * 86_400_000 }], 30)).toThrow(
      new InputError(
        'batch.tle:1: the epoch of B-A is 2026-12-06T15:22:30.000Z, 41.0 days from 2026-10-26T15:22:30.000Z, when it begins to hold: give the release that fits the elements (the limit is --max-age-days 30)',
      ),
    );
  });
});
