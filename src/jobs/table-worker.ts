import { parentPort } from 'node:worker_threads';
import type { EncounterRecords } from './encounter-records.js';
import { type PackedObjects, unpackObjects } from './packed-objects.js';
import { type RankedQuestion, type RankedSource, rankedText } from './ranked-text.js';
import type { ThreadMessage } from './worker-threads.js';

/** What a thread is handed: the source of the rows, its objects packed. */
export type TableBrief = {
  readonly records: EncounterRecords;
  readonly order: Uint32Array;
  readonly objects: PackedObjects;
};

/** Runs in a worker thread: makes the text of ranges of rows. */
function serve(): void {
  if (parentPort === null) throw new Error('table-worker runs in a worker thread only');
  const port = parentPort;
  let source: RankedSource | undefined;
  port.on('message', ({ brief, question }: ThreadMessage<TableBrief, RankedQuestion>) => {
    if (brief !== undefined) source = { ...brief, objects: unpackObjects(brief.objects) };
    if (source === undefined) throw new Error('rows were asked for before there were any');
    port.postMessage(rankedText(source, question));
  });
}

serve();
