import type { Writable } from 'node:stream';
import { finished } from 'node:stream/promises';
import { CONJUNCTION_COLUMNS } from '../tables/conjunctions-csv.js';
import { csvHeader } from '../tables/csv-text.js';
import { SENSITIVITY_COLUMNS } from '../tables/sensitivity-csv.js';
import type { OutputFolder } from './output-folder.js';
import { packObjects } from './packed-objects.js';
import type { RankedRecords } from './ranked-records.js';
import { NO_TEXT, type RankedQuestion, type RankedText, rankedText } from './ranked-text.js';
import type { JobPorts } from './screen-options.js';
import type { TableBrief } from './table-worker.js';
import { withWorkerThreads } from './worker-threads.js';

/** Rows that are made at a time. */
const ROWS_AT_A_TIME = 2000;
/** Fewer are made sooner than a thread is there. */
const LEAST_ROWS_FOR_THREADS = 80_000;
/** Ranges that threads work ahead of the file, which bounds memory. */
const AHEAD_PER_THREAD = 3;

type TextOf = (question: RankedQuestion) => RankedText | Promise<RankedText>;

/** Writes `conjunctions.csv` and `sensitivity.csv`, many rows in as many threads as there are workers. */
export async function writeRankedTables(
  folder: OutputFolder,
  ranked: RankedRecords,
  workers: number,
  ports: Pick<JobPorts, 'onStop'>,
): Promise<void> {
  const { records, order, objects, count } = ranked;
  if (workers < 2 || count < LEAST_ROWS_FOR_THREADS) {
    await writeBoth(folder, count, 0, (question) => rankedText(ranked, question));
    return;
  }
  const brief: TableBrief = { records, order, objects: packObjects(objects) };
  const script = new URL('./table-worker.js', import.meta.url);
  await withWorkerThreads<TableBrief, RankedQuestion, RankedText, void>(script, workers, ports, ({ ask }) =>
    writeBoth(folder, count, AHEAD_PER_THREAD * workers, (question) => ask(brief, question)),
  );
}

async function writeBoth(folder: OutputFolder, count: number, ahead: number, textOf: TextOf): Promise<void> {
  const conjunctions = folder.stream('conjunctions.csv');
  const sensitivity = folder.stream('sensitivity.csv');
  const ends = Promise.all([finished(conjunctions), finished(sensitivity)]);
  // Whatever they end with comes up below, but not before it is waited for.
  ends.catch(() => undefined);
  try {
    await give(conjunctions, csvHeader(CONJUNCTION_COLUMNS));
    await give(sensitivity, csvHeader(SENSITIVITY_COLUMNS));
    for await (const text of inOrder(count, ahead, textOf)) {
      await give(conjunctions, text.conjunctions);
      await give(sensitivity, text.sensitivity);
    }
    conjunctions.end();
    sensitivity.end();
    await ends;
  } finally {
    conjunctions.destroy();
    sensitivity.destroy();
  }
}

/** Waits until the stream has taken it and needs its memory no more. */
function give(stream: Writable, chunk: string | Uint8Array): Promise<void> {
  return new Promise((resolve, reject) => {
    stream.write(chunk, (error) => (error ? reject(error) : resolve()));
  });
}

/** A text is the reader's until it takes the next one. */
async function* inOrder(count: number, ahead: number, textOf: TextOf): AsyncGenerator<RankedText> {
  const asked: Promise<RankedText>[] = [];
  let spent = NO_TEXT;
  for (let from = 0; from < count; from += ROWS_AT_A_TIME) {
    const text = Promise.resolve(textOf({ from, to: Math.min(count, from + ROWS_AT_A_TIME), spent }));
    // Nobody waits for what is under way when the files break off.
    text.catch(() => undefined);
    asked.push(text);
    if (asked.length > ahead) {
      spent = await (asked.shift() as Promise<RankedText>);
      yield spent;
    }
  }
  for (const text of asked) yield await text;
}
