import { createReadStream } from 'node:fs';
import { AGE_KNOTS_DAYS } from '../../uncertainty/calibrate-age-knots.js';
import { type BufferedFile, createBufferedFile } from './buffered-file.js';

const VALUES = 6;
const BYTES = VALUES * 8;

type HeldBackDifference = {
  /** Whether the object has rows of its own: then the class is not what a screening would use. */
  readonly hasOwnRows: boolean;
  readonly orbitClass: number;
  readonly knot: number;
  readonly ageDays: number;
  readonly differenceRtnM: ArrayLike<number>;
};

/** Held-back differences that wait on disk, 48 bytes each, for the growth law of their class: it is known when all objects are done. */
export type HeldBackDifferences = {
  readonly add: (difference: HeldBackDifference) => void;
  readonly file: BufferedFile;
};

export function createHeldBackDifferences(path: string): HeldBackDifferences {
  const file = createBufferedFile(path);
  return {
    file,
    add: ({ hasOwnRows, orbitClass, knot, ageDays, differenceRtnM }) => {
      const values = Float64Array.of(
        hasOwnRows ? 1 : 0,
        orbitClass * AGE_KNOTS_DAYS.length + knot,
        ageDays,
        differenceRtnM[0],
        differenceRtnM[1],
        differenceRtnM[2],
      );
      file.write(new Uint8Array(values.buffer));
    },
  };
}

/** Reads them again, in the order in which they were added, some thousands at a time. */
export async function* readHeldBackDifferences(path: string): AsyncGenerator<HeldBackDifference[]> {
  let rest = Buffer.alloc(0);
  for await (const chunk of createReadStream(path, { highWaterMark: BYTES * 8192 })) {
    const bytes = Buffer.concat([rest, chunk as Buffer]);
    const whole = bytes.length - (bytes.length % BYTES);
    const values = new Float64Array(new Uint8Array(bytes.subarray(0, whole)).buffer);
    const differences: HeldBackDifference[] = [];
    for (let i = 0; i < values.length; i += VALUES) {
      differences.push({
        hasOwnRows: values[i] === 1,
        orbitClass: Math.floor(values[i + 1] / AGE_KNOTS_DAYS.length),
        knot: values[i + 1] % AGE_KNOTS_DAYS.length,
        ageDays: values[i + 2],
        differenceRtnM: values.subarray(i + 3, i + VALUES),
      });
    }
    yield differences;
    rest = bytes.subarray(whole);
  }
}
