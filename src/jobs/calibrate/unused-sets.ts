import type { UnusedElements } from '../../elements/element-set.js';
import { csvHeader, csvRow } from '../../tables/csv-text.js';
import { UNUSED_ELEMENTS_COLUMNS } from '../../tables/unused-elements-csv.js';
import { createBufferedFile } from './buffered-file.js';

const EXAMPLES = 10;

/** Lists sets that are not used as they turn up, so that there may be any number of them. */
export type UnusedSets = {
  readonly add: (set: UnusedElements) => void;
  readonly finish: () => void;
  readonly abandon: () => void;
  /** The first rejected ones. */
  readonly examples: readonly UnusedElements[];
};

/** @param path of the CSV file to create */
export function createUnusedSets(path: string): UnusedSets {
  const file = createBufferedFile(path);
  const examples: UnusedElements[] = [];
  let count = 0;
  file.write(Buffer.from(csvHeader(UNUSED_ELEMENTS_COLUMNS)));
  return {
    add: (set) => {
      file.write(Buffer.from(csvRow(UNUSED_ELEMENTS_COLUMNS, set, ++count)));
      if (set.reason === 'rejected' && examples.length < EXAMPLES) examples.push(set);
    },
    finish: file.finish,
    abandon: file.abandon,
    examples,
  };
}
