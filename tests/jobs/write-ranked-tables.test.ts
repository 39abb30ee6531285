import { Writable } from 'node:stream';
import { beforeAll, describe, expect, it } from 'vitest';
import { loadSgp4 } from '../../src/ephemeris/sgp4-module.js';
import { sensitivityOf } from '../../src/jobs/conjunctions.js';
import { createEncounterRecords, extendRecords, FIELD } from '../../src/jobs/encounter-records.js';
import type { OutputFolder } from '../../src/jobs/output-folder.js';
import { rankedRecords } from '../../src/jobs/ranked-records.js';
import { screenedObjects } from '../../src/jobs/screened-object.js';
import { writeRankedTables } from '../../src/jobs/write-ranked-tables.js';
import { CONJUNCTION_COLUMNS } from '../../src/tables/conjunctions-csv.js';
import { csvHeader, csvRow } from '../../src/tables/csv-text.js';
import { SENSITIVITY_COLUMNS } from '../../src/tables/sensitivity-csv.js';
import { defaultSigmaTable } from '../../src/uncertainty/default-sigma-table.js';
import { syntheticCatalog } from '../synthetic/catalog.js';
import { seededRandom } from '../synthetic/random.js';
import { silentPorts } from './silent-ports.js';

type WriteRankedTables = typeof import('../../src/jobs/write-ranked-tables.js');

const START_MS = Date.UTC(2026, 11, 1);

/** A folder whose files are kept as bytes. */
function folderInMemory(): { folder: OutputFolder; files: Map<string, Buffer> } {
  const files = new Map<string, Buffer>();
  const stream = (name: string) => {
    const chunks: Buffer[] = [];
    return new Writable({
      write(chunk: Buffer, _encoding, done) {
        // Once it is taken, its memory is used for what comes later.
        chunks.push(Buffer.from(chunk));
        done();
      },
      final(done) {
        files.set(name, Buffer.concat(chunks));
        done();
      },
    });
  };
  return { folder: { stream } as unknown as OutputFolder, files };
}

/** More encounters than are written in one thread, the figures drawn. */
function manyEncounters(count: number) {
  const random = seededRandom(81);
  const knowledge = { listed: undefined, sigmas: undefined, defaultSigmas: defaultSigmaTable() };
  const objects = screenedObjects(syntheticCatalog({ seed: 82, count: 50, epochMs: START_MS }), knowledge);
  const records = createEncounterRecords(count, SharedArrayBuffer);
  const places = Object.values(FIELD);
  for (let k = 0; k < count; k++) {
    const at = extendRecords(records, 1);
    for (const place of places) records.data[at + place] = random.between(1, 7000);
    records.data[at + FIELD.first] = random.integer(25);
    records.data[at + FIELD.second] = 25 + random.integer(25);
    records.data[at + FIELD.tcaMs] = START_MS + random.integer(86_400_000);
    records.data[at + FIELD.probability] = 10 ** random.between(-12, -3);
    records.data[at + FIELD.method] = 1;
    records.data[at + FIELD.remarks] = random.integer(16);
  }
  return rankedRecords(records, objects);
}

/** Threads run the compiled build. */
async function compiled(): Promise<WriteRankedTables> {
  return await import(new URL('../../dist/jobs/write-ranked-tables.js', import.meta.url).href);
}

beforeAll(loadSgp4);

describe('the ranked tables', () => {
  it('have the same bytes from one thread and from three', async () => {
    const { writeRankedTables } = await compiled();
    const ranked = manyEncounters(81_234);
    const one = folderInMemory();
    await writeRankedTables(one.folder, ranked, 1, silentPorts());
    const three = folderInMemory();
    const ports = silentPorts();
    await writeRankedTables(three.folder, ranked, 3, ports);
    expect(ports.undos.size, 'what a signal would undo').toBe(0);
    for (const name of ['conjunctions.csv', 'sensitivity.csv']) {
      const bytes = one.files.get(name) ?? Buffer.alloc(0);
      expect(three.files.get(name)?.equals(bytes), name).toBe(true);
      const ranks = bytes
        .toString()
        .split('\r\n')
        .slice(1, -1)
        .map((row) => Number(row.slice(0, row.indexOf(','))));
      expect(ranks.length).toBe(ranked.count);
      expect(ranks.every((rank, k) => rank === k + 1)).toBe(true);
    }
  });

  it('have the rows that their columns make, in the order of the ranks', async () => {
    const ranked = manyEncounters(2345);
    const { folder, files } = folderInMemory();
    await writeRankedTables(folder, ranked, 1, silentPorts());
    const { records, order, objects, count, at } = ranked;
    const numbers = Array.from({ length: count }, (_, index) => index);
    const row = (index: number) => csvRow(CONJUNCTION_COLUMNS, at(index), index + 1);
    const conjunctions = csvHeader(CONJUNCTION_COLUMNS) + numbers.map(row).join('');
    // Not by toBe: it would print two million bytes.
    expect(files.get('conjunctions.csv')?.toString() === conjunctions).toBe(true);
    const sensitivityRow = (index: number) =>
      csvRow(SENSITIVITY_COLUMNS, sensitivityOf(records, order[index], index + 1, objects), index + 1);
    const sensitivity = csvHeader(SENSITIVITY_COLUMNS) + numbers.map(sensitivityRow).join('');
    expect(files.get('sensitivity.csv')?.toString() === sensitivity).toBe(true);
  });

  it.each(['conjunctions.csv', 'sensitivity.csv'])(
    'end both files when %s cannot be written',
    async (full) => {
      const { writeRankedTables } = await compiled();
      const streams: Writable[] = [];
      const stream = (name: string) => {
        const one = new Writable({
          write: (chunk: Buffer, _encoding, done) =>
            done(name === full && chunk.length > 2000 ? new Error('no space left on device') : null),
        });
        streams.push(one);
        return one;
      };
      for (const [count, workers] of [
        [10, 1],
        [80_000, 2],
      ]) {
        const ports = silentPorts();
        const written = writeRankedTables(
          { stream } as unknown as OutputFolder,
          manyEncounters(count),
          workers,
          ports,
        );
        await expect(written).rejects.toThrow('no space left');
        expect(streams.splice(0).map((one) => one.destroyed)).toEqual([true, true]);
        expect(ports.undos.size).toBe(0);
      }
    },
  );
});
