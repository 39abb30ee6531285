import { readFile } from 'node:fs/promises';
import { join } from 'node:path';
import type { ElementSet } from '../../elements/element-set.js';
import { createBufferedFile } from './buffered-file.js';
import { RECORD_BYTES, type SetRecords, setRecordsOver, writeRecord } from './set-records.js';

/**
 * Ten million sets make 78 000 a partition, 6 MB: small beside everything else. More would only cost file
 * handles and buffers.
 */
export const PARTITION_COUNT = 128;
const BUFFER_BYTES = RECORD_BYTES * 512;

/** Element sets on their way to temporary files, all sets of an object to the same. */
export type Partitions = {
  readonly add: (set: ElementSet, file: number) => void;
  /** Writes what is still in memory and closes the files. */
  readonly finish: () => void;
  /** Closes the files without caring for what is in them. */
  readonly abandon: () => void;
};

/**
 * Opens one file a partition in `folder`. Memory: 5 MB of buffers, whatever is written; on disk, 80 bytes a set.
 *
 * @throws what the file system throws, for instance when the disk is full
 */
export function createPartitions(folder: string): Partitions {
  const files = Array.from({ length: PARTITION_COUNT }, (_, i) =>
    createBufferedFile(partitionPath(folder, i), BUFFER_BYTES),
  );
  const one = setRecordsOver(new ArrayBuffer(RECORD_BYTES));
  const bytes = new Uint8Array(one.words.buffer);
  return {
    add: (set, file) => {
      writeRecord(one, 0, set, file);
      files[partitionOf(Number(set.designator))].write(bytes);
    },
    finish: () => {
      for (const file of files) file.finish();
    },
    abandon: () => {
      for (const file of files) file.abandon();
    },
  };
}

/** All sets of one partition, in the order in which they were added. */
export async function readPartition(folder: string, partition: number): Promise<SetRecords> {
  const bytes = await readFile(partitionPath(folder, partition));
  const own = new ArrayBuffer(bytes.length);
  new Uint8Array(own).set(bytes);
  return setRecordsOver(own);
}

/** Which partition an object belongs to: multiplicative hashing (Knuth, TAOCP vol. 3, 6.4) spreads runs of numbers evenly. */
export function partitionOf(designator: number): number {
  return Math.floor((Math.imul(designator, 2_654_435_769) >>> 0) / (2 ** 32 / PARTITION_COUNT));
}

function partitionPath(folder: string, partition: number): string {
  return join(folder, `sets-${partition}.bin`);
}
