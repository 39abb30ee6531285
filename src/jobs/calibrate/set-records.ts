import type { ElementSet } from '../../elements/element-set.js';
import type { MeanElements } from '../../elements/sgp4-record.js';

/** Four whole numbers of 32 bits (designator, file, line, unused) and eight doubles (epoch, elements). */
export const RECORD_BYTES = 80;
const WORDS = RECORD_BYTES / 4;
const DOUBLES = RECORD_BYTES / 8;
const LARGEST_DESIGNATOR = 4_294_967_295;

/** Element sets side by side in memory of a fixed size each. */
export type SetRecords = {
  readonly count: number;
  readonly words: Uint32Array;
  readonly doubles: Float64Array;
};

/** Sets over one block of bytes; its length is a multiple of `RECORD_BYTES`. */
export function setRecordsOver(buffer: ArrayBuffer): SetRecords {
  return {
    count: buffer.byteLength / RECORD_BYTES,
    words: new Uint32Array(buffer),
    doubles: new Float64Array(buffer),
  };
}

/** Whether `text` is a catalog number that a record can hold. */
export function isStorableDesignator(text: string): boolean {
  return /^\d{1,10}$/.test(text) && Number(text) <= LARGEST_DESIGNATOR;
}

/** @param file index of the file that the set was read from */
export function writeRecord(records: SetRecords, index: number, set: ElementSet, file: number): void {
  const { words, doubles } = records;
  words[index * WORDS] = Number(set.designator);
  words[index * WORDS + 1] = file;
  words[index * WORDS + 2] = set.source.line;
  words[index * WORDS + 3] = 0;
  const at = index * DOUBLES + 2;
  doubles[at] = set.epochMs;
  doubles[at + 1] = set.meanMotionRevPerDay;
  doubles[at + 2] = set.eccentricity;
  doubles[at + 3] = set.inclinationDeg;
  doubles[at + 4] = set.rightAscensionDeg;
  doubles[at + 5] = set.argumentOfPerigeeDeg;
  doubles[at + 6] = set.meanAnomalyDeg;
  doubles[at + 7] = set.bstar;
}

export function designatorAt(records: SetRecords, index: number): number {
  return records.words[index * WORDS];
}

export function fileAt(records: SetRecords, index: number): number {
  return records.words[index * WORDS + 1];
}

export function lineAt(records: SetRecords, index: number): number {
  return records.words[index * WORDS + 2];
}

export function epochMsAt(records: SetRecords, index: number): number {
  return records.doubles[index * DOUBLES + 2];
}

export function elementsAt(records: SetRecords, index: number): MeanElements {
  const { doubles } = records;
  const at = index * DOUBLES + 2;
  return {
    epochMs: doubles[at],
    meanMotionRevPerDay: doubles[at + 1],
    eccentricity: doubles[at + 2],
    inclinationDeg: doubles[at + 3],
    rightAscensionDeg: doubles[at + 4],
    argumentOfPerigeeDeg: doubles[at + 5],
    meanAnomalyDeg: doubles[at + 6],
    bstar: doubles[at + 7],
  };
}

/** Orders by the elements, the epoch aside; 0 only for equal ones. */
export function compareElements(records: SetRecords, a: number, b: number): number {
  const { doubles } = records;
  for (let i = 3; i < DOUBLES; i++) {
    const difference = doubles[a * DOUBLES + i] - doubles[b * DOUBLES + i];
    if (difference !== 0) return difference;
  }
  return 0;
}

/** Orders by where the sets were read. */
export function compareSources(records: SetRecords, a: number, b: number): number {
  return fileAt(records, a) - fileAt(records, b) || lineAt(records, a) - lineAt(records, b);
}
