import { describe, expect, it } from 'vitest';
import { countFiles } from '../../src/elements/count-files.js';
import type { ElementSet } from '../../src/elements/element-set.js';
import { readElementFiles } from '../../src/elements/read.js';
import { selectSets } from '../../src/elements/select.js';
import { InputError } from '../../src/input-error.js';
import { seededRandom } from '../synthetic/random.js';
import { inFolder, inventedSet, inventedSets, jsonFile, twoLineFile } from './formats.js';

const HOUR_MS = 3_600_000;
const START_MS = Date.UTC(2031, 2, 3);

let line = 0;

function at(hours: number, designator = '99001', file = 'fleet'): ElementSet {
  line += 1;
  return inventedSet({ designator, epochMs: START_MS + hours * HOUR_MS, source: { file, line, text: '' } });
}

describe('the set that is used', () => {
  it('is the newest not after the start', () => {
    const [old, newest, after] = [at(-30), at(-2), at(1)];
    for (const fleet of [
      [old, newest, after],
      [after, newest, old],
      [newest, old, after],
    ]) {
      const { fleet: used, superseded } = selectSets({ fleet, catalog: [], startMs: START_MS });
      expect(used).toEqual([newest]);
      expect(superseded.map((unused) => unused.source)).toEqual(
        fleet.filter((set) => set !== newest).map((set) => set.source),
      );
    }
  });

  it('may have its epoch right at the start', () => {
    const fleet = [at(-1), at(0), at(0.001)];
    expect(selectSets({ fleet, catalog: [], startMs: START_MS }).fleet).toEqual([fleet[1]]);
  });

  it('is the nearest where all lie after the start', () => {
    const fleet = [at(9), at(3), at(5)];
    expect(selectSets({ fleet, catalog: [], startMs: START_MS }).fleet).toEqual([fleet[1]]);
  });

  it('is the first of equal epochs', () => {
    const catalog = [at(-3), at(-3), at(-3)];
    expect(selectSets({ fleet: [], catalog, startMs: START_MS }).catalog).toEqual([catalog[0]]);
  });

  it('is the one of the fleet where the catalog has the object too, be it older', () => {
    const fleet = [at(-50)];
    const catalog = [at(-1, '99001', 'catalog'), at(-1, '99002', 'catalog'), at(-2, '99001', 'catalog')];
    const selection = selectSets({ fleet, catalog, startMs: START_MS });
    expect(selection.fleet).toEqual(fleet);
    expect(selection.catalog).toEqual([catalog[1]]);
    expect(selection.superseded.map((unused) => unused.source)).toEqual([
      catalog[0].source,
      catalog[2].source,
    ]);
  });

  it('is each of those without a number', () => {
    const sets = [at(-3, ''), at(-2, ''), at(-2, '99001')];
    const selection = selectSets({ fleet: sets, catalog: [at(-3, '')], startMs: START_MS });
    expect(selection.fleet).toEqual([sets[2], sets[0], sets[1]]);
    expect(selection.catalog.length).toBe(1);
  });

  it('stands in the order of the catalog numbers, as numbers', () => {
    const catalog = ['100000', '99999', '7', '987654321', '12'].map((designator) => at(-1, designator));
    const { catalog: used } = selectSets({ fleet: [], catalog, startMs: START_MS });
    expect(used.map((set) => set.designator)).toEqual(['7', '12', '99999', '100000', '987654321']);
  });
});

it('every superseded set names the one that took its place, and why', () => {
  line = 0;
  const fleet = [at(-30), at(-2), at(1), at(-2)];
  const catalog = [at(-1, '99001', 'catalog'), at(5, '99002', 'catalog'), at(4, '99002', 'catalog')];
  const { superseded } = selectSets({ fleet, catalog, startMs: START_MS });
  expect(superseded.map(({ designator, reason, detail }) => [designator, reason, detail])).toEqual([
    [
      '99001',
      'superseded',
      'epoch 2031-03-01T18:00:00.000Z; used instead: fleet:2, epoch 2031-03-02T22:00:00.000Z (newer, not after the start)',
    ],
    [
      '99001',
      'superseded',
      'epoch 2031-03-03T01:00:00.000Z; used instead: fleet:2, epoch 2031-03-02T22:00:00.000Z (the newest not after the start)',
    ],
    [
      '99001',
      'superseded',
      'epoch 2031-03-02T22:00:00.000Z; used instead: fleet:2, epoch 2031-03-02T22:00:00.000Z (same epoch, read first)',
    ],
    [
      '99001',
      'superseded',
      'epoch 2031-03-02T23:00:00.000Z; used instead: fleet:2, epoch 2031-03-02T22:00:00.000Z (the fleet has elements of its own)',
    ],
    [
      '99002',
      'superseded',
      'epoch 2031-03-03T05:00:00.000Z; used instead: catalog:7, epoch 2031-03-03T04:00:00.000Z (nearer to the start)',
    ],
  ]);
});

it('agrees with sorting, on random histories', () => {
  const random = seededRandom(20_310_303);
  for (let round = 0; round < 200; round++) {
    const sets = Array.from({ length: 1 + random.integer(40) }, () =>
      at(random.integer(20) - 10, String(99_001 + random.integer(6))),
    );
    const { catalog, superseded } = selectSets({ fleet: [], catalog: sets, startMs: START_MS });
    expect(catalog.length + superseded.length).toBe(sets.length);
    for (const used of catalog) {
      const own = sets.filter((set) => set.designator === used.designator);
      const before = own.filter((set) => set.epochMs <= START_MS);
      const epoch =
        before.length > 0
          ? Math.max(...before.map((set) => set.epochMs))
          : Math.min(...own.map((set) => set.epochMs));
      expect(used).toBe(own.find((set) => set.epochMs === epoch));
    }
  }
});

it('refuses a start that is no time', () => {
  expect(() => selectSets({ fleet: [], catalog: [], startMs: Number.NaN })).toThrow(RangeError);
});

describe('the accounts of the files', () => {
  const sets = inventedSets(10);

  it('add up: read = used + superseded + rejected', async () => {
    const files = {
      fleet: `${twoLineFile(sets.slice(0, 3))}${twoLineFile(sets.slice(0, 1))}prose\n`,
      catalog: jsonFile([...sets, ...sets.slice(7)]),
    };
    await inFolder(files, async (path) => {
      const fleet = await readElementFiles([path('fleet')]);
      const catalog = await readElementFiles([path('catalog')]);
      const selection = selectSets({ fleet: fleet.sets, catalog: catalog.sets, startMs: START_MS });
      const counts = countFiles([...fleet.files, ...catalog.files], selection);
      expect(counts).toEqual([
        { file: path('fleet'), sha256: fleet.files[0].sha256, read: 5, used: 3, superseded: 1, rejected: 1 },
        {
          file: path('catalog'),
          sha256: catalog.files[0].sha256,
          read: 13,
          used: 7,
          superseded: 6,
          rejected: 0,
        },
      ]);
    });
  });

  it('have one row for a file that is fleet and catalog at once', async () => {
    await inFolder({ all: `${twoLineFile(sets)}prose\n` }, async (path) => {
      const reading = await readElementFiles([path('all')]);
      const selection = selectSets({ fleet: reading.sets, catalog: reading.sets, startMs: START_MS });
      const [count, ...others] = countFiles([...reading.files, ...reading.files], selection);
      expect(others).toEqual([]);
      expect(count).toMatchObject({ read: 22, used: 10, superseded: 10, rejected: 2 });
    });
  });

  it('complain of a file that changed, of sets from nowhere, and of sets that are lost', () => {
    const fleet = [at(-1)];
    const selection = { fleet, catalog: [], superseded: [] };
    const file = { file: 'fleet', sha256: 'a', read: 1, rejected: 0 };
    expect(countFiles([file], selection)[0].used).toBe(1);
    expect(() => countFiles([file, { ...file, sha256: 'b' }], selection)).toThrow(InputError);
    expect(() => countFiles([], selection)).toThrow('not counted as read');
    expect(() => countFiles([{ ...file, read: 2 }], selection)).toThrow('2 records read, but 1 used');
  });
});
