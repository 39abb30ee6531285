import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import type { ElementSet } from '../../src/elements/element-set.js';
import { type ReadResult, readElementFiles } from '../../src/elements/read.js';
import { dayOfYearToMs } from '../../src/elements/utc.js';
import { toThreeLine, toTwoLine } from '../synthetic/two-line.js';

/** An invented object in an invented orbit; no real spacecraft bears these numbers. */
export function inventedSet(change: Partial<ElementSet> = {}): ElementSet {
  return {
    designator: '99001',
    name: 'KESTREL-1',
    internationalDesignator: '2031-901A',
    epochMs: dayOfYearToMs(2031, 61) + 0.25 * 86_400_000,
    meanMotionRevPerDay: 15.0225,
    eccentricity: 0.0012,
    inclinationDeg: 53.05,
    rightAscensionDeg: 120.25,
    argumentOfPerigeeDeg: 77.5,
    meanAnomalyDeg: 200.125,
    bstar: 0.00012345,
    source: { file: '', line: 0, text: '' },
    ...change,
  };
}

/** Invented objects in a row: different planes, eccentricities, epochs, signs of B*. */
export function inventedSets(count: number): ElementSet[] {
  return Array.from({ length: count }, (_, i) =>
    inventedSet({
      designator: String(i % 5 === 4 ? 270_001 + i : 99_001 + i),
      name: `KESTREL-${i + 1}`,
      internationalDesignator: `2031-${901 + (i % 90)}${'ABCDEFGH'[i % 8]}`,
      epochMs: dayOfYearToMs(2031, 61 + (i % 7)) + (i % 4) * 0.125 * 86_400_000,
      meanMotionRevPerDay: i % 6 === 5 ? 2.00625 : 14.5 + (i % 10) * 0.0625,
      eccentricity: i % 6 === 5 ? 0.6875 : (5 + (i % 9)) / 10_000,
      rightAscensionDeg: (i * 37.5) % 360,
      meanAnomalyDeg: (i * 101.25) % 360,
      bstar: i % 3 === 2 ? -0.000125 : 0.00012345,
    }),
  );
}

export function twoLineFile(sets: readonly ElementSet[]): string {
  return sets.map((set) => `${toTwoLine(set).join('\n')}\n`).join('');
}

export function threeLineFile(sets: readonly ElementSet[]): string {
  return sets.map((set) => `${toThreeLine(set).join('\n')}\n`).join('');
}

/** Calendar form with six decimals of a second, as services publish it. */
export function isoMicroseconds(ms: number): string {
  const seconds = Math.floor(ms / 1000);
  const microseconds = Math.round((ms - seconds * 1000) * 1000);
  return `${new Date(seconds * 1000).toISOString().slice(0, 19)}.${String(microseconds).padStart(6, '0')}`;
}

export type OmmRecord = Record<string, string | number>;

export function ommRecord(set: ElementSet): OmmRecord {
  return {
    OBJECT_NAME: set.name,
    OBJECT_ID: set.internationalDesignator,
    CENTER_NAME: 'EARTH',
    REF_FRAME: 'TEME',
    TIME_SYSTEM: 'UTC',
    MEAN_ELEMENT_THEORY: 'SGP4',
    EPOCH: isoMicroseconds(set.epochMs),
    MEAN_MOTION: set.meanMotionRevPerDay,
    ECCENTRICITY: set.eccentricity,
    INCLINATION: set.inclinationDeg,
    RA_OF_ASC_NODE: set.rightAscensionDeg,
    ARG_OF_PERICENTER: set.argumentOfPerigeeDeg,
    MEAN_ANOMALY: set.meanAnomalyDeg,
    EPHEMERIS_TYPE: 0,
    CLASSIFICATION_TYPE: 'U',
    NORAD_CAT_ID: Number(set.designator),
    ELEMENT_SET_NO: 999,
    REV_AT_EPOCH: 10,
    BSTAR: set.bstar,
    MEAN_MOTION_DOT: 0,
    MEAN_MOTION_DDOT: 0,
  };
}

export function kvnMessage(record: OmmRecord): string {
  const head = 'CCSDS_OMM_VERS = 3.0\nCREATION_DATE = 2031-03-02T00:00:00\nORIGINATOR = KESTREL\n';
  return (
    head +
    Object.entries(record)
      .map(([keyword, value]) => `${keyword} = ${value}\n`)
      .join('')
  );
}

const METADATA = [
  'OBJECT_NAME',
  'OBJECT_ID',
  'CENTER_NAME',
  'REF_FRAME',
  'TIME_SYSTEM',
  'MEAN_ELEMENT_THEORY',
];
const MEAN_ELEMENTS = [
  'EPOCH',
  'SEMI_MAJOR_AXIS',
  'MEAN_MOTION',
  'ECCENTRICITY',
  'INCLINATION',
  'RA_OF_ASC_NODE',
  'ARG_OF_PERICENTER',
  'MEAN_ANOMALY',
];

export function xmlMessage(record: OmmRecord): string {
  const leaves = (wanted: (keyword: string) => boolean) =>
    Object.entries(record)
      .filter(([keyword]) => wanted(keyword))
      .map(([keyword, value]) => `<${keyword}>${value}</${keyword}>\n`)
      .join('');
  return [
    '<omm id="CCSDS_OMM_VERS" version="3.0">',
    '<header><CREATION_DATE>2031-03-02T00:00:00</CREATION_DATE><ORIGINATOR>KESTREL</ORIGINATOR></header>',
    '<body><segment>',
    `<metadata>${leaves((keyword) => METADATA.includes(keyword))}</metadata>`,
    `<data><meanElements>${leaves((keyword) => MEAN_ELEMENTS.includes(keyword))}</meanElements>`,
    `<tleParameters>${leaves((keyword) => !METADATA.includes(keyword) && !MEAN_ELEMENTS.includes(keyword))}</tleParameters></data>`,
    '</segment></body>',
    '</omm>\n',
  ].join('\n');
}

export function kvnFile(sets: readonly ElementSet[]): string {
  return sets.map((set) => kvnMessage(ommRecord(set))).join('\n');
}

export function xmlFile(sets: readonly ElementSet[]): string {
  return `<?xml version="1.0" encoding="UTF-8"?>\n<ndm>\n${sets.map((set) => xmlMessage(ommRecord(set))).join('')}</ndm>\n`;
}

export function jsonFile(sets: readonly ElementSet[], indent?: number): string {
  return JSON.stringify(sets.map(ommRecord), null, indent);
}

export function csvFile(sets: readonly ElementSet[]): string {
  const records = sets.map(ommRecord);
  return `${[Object.keys(records[0]), ...records.map((record) => Object.values(record))].map((row) => row.join(',')).join('\n')}\n`;
}

/** Runs `work` on files of a fresh folder, and removes it. */
export async function inFolder<T>(
  files: Readonly<Record<string, string | Uint8Array>>,
  work: (path: (name: string) => string) => Promise<T>,
): Promise<T> {
  const folder = mkdtempSync(join(tmpdir(), 'elements-'));
  try {
    for (const [name, content] of Object.entries(files)) writeFileSync(join(folder, name), content);
    return await work((name) => join(folder, name));
  } finally {
    rmSync(folder, { recursive: true });
  }
}

/** Reads text as a file. */
export function readText(
  content: string | Uint8Array,
  options?: Parameters<typeof readElementFiles>[1],
): Promise<ReadResult> {
  return inFolder({ file: content }, (path) => readElementFiles([path('file')], options));
}

/** The elements of a set, without where it was read. */
export function elementsOf({ source: _, ...elements }: ElementSet): Omit<ElementSet, 'source'> {
  return elements;
}
