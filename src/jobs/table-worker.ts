import { parentPort } from 'node:worker_threads';
import { type RowRange, type TableSource, tableText } from './table-text.js';
import type { ThreadMessage } from './worker-threads.js';

/** Runs in a worker thread: makes the text of ranges of rows. */
function serve(): void {
  if (parentPort === null) throw new Error('table-worker runs in a worker thread only');
  const port = parentPort;
  let source: TableSource | undefined;
  port.on('message', ({ brief, question }: ThreadMessage<TableSource, RowRange>) => {
    source = brief ?? source;
    if (source === undefined) throw new Error('rows were asked for before there were any');
    port.postMessage(tableText(source, question));
  });
}

serve();
