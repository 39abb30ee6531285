import { Readable } from 'node:stream';
import { pipeline } from 'node:stream/promises';
import { CONJUNCTION_COLUMNS } from '../tables/conjunctions-csv.js';
import { csvHeader } from '../tables/csv-text.js';
import { SENSITIVITY_COLUMNS } from '../tables/sensitivity-csv.js';
import type { OutputFolder } from './output-folder.js';
import type { RankedRecords } from './ranked-records.js';
import type { JobPorts } from './screen-options.js';
import { shownObject } from './screened-object.js';
import { type RowRange, type TableSource, tableText } from './table-text.js';
import { withWorkerThreads } from './worker-threads.js';

/** Rows that are made at a time. */
const ROWS_AT_A_TIME = 2000;
/** Fewer are made sooner than a thread is there. */
const LEAST_ROWS_FOR_THREADS = 40_000;
/** Ranges that threads work ahead of the file, which bounds memory. */
const AHEAD_PER_THREAD = 3;

type TextOf = (range: RowRange) => string | Promise<string>;

/** Writes `conjunctions.csv` and `sensitivity.csv`, many rows in as many threads as there are workers. */
export async function writeRankedTables(
  folder: OutputFolder,
  ranked: RankedRecords,
  workers: number,
  ports: Pick<JobPorts, 'onStop'>,
): Promise<void> {
  const { records, order, objects, count } = ranked;
  if (workers < 2 || count < LEAST_ROWS_FOR_THREADS) {
    await writeBoth(folder, count, 0, (range) => tableText(ranked, range));
    return;
  }
  const source: TableSource = { records, order, objects: objects.map(shownObject) };
  const script = new URL('./table-worker.js', import.meta.url);
  await withWorkerThreads<TableSource, RowRange, string, void>(script, workers, ports, ({ ask }) =>
    writeBoth(folder, count, AHEAD_PER_THREAD * workers, (range) => ask(source, range)),
  );
}

async function writeBoth(folder: OutputFolder, count: number, ahead: number, textOf: TextOf): Promise<void> {
  for (const [table, columns] of [
    ['conjunctions', CONJUNCTION_COLUMNS],
    ['sensitivity', SENSITIVITY_COLUMNS],
  ] as const) {
    const texts = inOrder(table, count, ahead, csvHeader<never>(columns), textOf);
    await pipeline(Readable.from(texts), folder.stream(`${table}.csv`));
  }
}

async function* inOrder(
  table: RowRange['table'],
  count: number,
  ahead: number,
  header: string,
  textOf: TextOf,
): AsyncGenerator<string> {
  yield header;
  const asked: (string | Promise<string>)[] = [];
  for (let from = 0; from < count; from += ROWS_AT_A_TIME) {
    asked.push(textOf({ table, from, to: Math.min(count, from + ROWS_AT_A_TIME) }));
    if (asked.length > ahead) yield await (asked.shift() as string | Promise<string>);
  }
  for (const text of asked) yield await text;
}
