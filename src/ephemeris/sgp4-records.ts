import { constants, type SatRec } from 'satellite.js';
import { type MeanElements, sgp4RecordOf } from '../elements/sgp4-record.js';
import { type Field, type Sgp4Module, sgp4Module } from './sgp4-module.js';

/**
 * SGP4 records as the WebAssembly module of satellite.js holds them, one after the other, in memory that threads
 * share. In JavaScript a record is some hundred numbers, each an object of its own.
 */
export type Sgp4Records = {
  /** What the times of the records count from, milliseconds of UTC since 1970-01-01: then doubles resolve them. */
  readonly originMs: number;
  /** The same memory three times. */
  readonly values: Float64Array;
  readonly integers: Int32Array;
  readonly bytes: Uint8Array;
  /** Doubles a record. */
  readonly size: number;
};

/** A record among others. */
export type PlacedRecord = { readonly records: Sgp4Records; readonly place: number };

const MS_PER_DAY = 86_400_000;
/** The fields from the first to the second are of deep-space orbits alone, but for the sidereal time among them. */
const DEEP_SPACE = ['irez', 'xni'];
const NOT_DEEP_SPACE = 'gsto';
/** satellite.js has these under another name. */
const RENAMED: Readonly<Record<string, string>> = { no_unkozai: 'no' };
const EARTH: Readonly<Record<string, number>> = {
  radiusearthkm: constants.earthRadius,
  tumin: constants.tumin,
  xke: constants.xke,
  j2: constants.j2,
  j3: constants.j3,
  j4: constants.j4,
  j3oj2: constants.j3oj2,
};
const DEEP_SPACE_METHOD = 'd'.charCodeAt(0);

type OwnField = Field & { readonly key: string; readonly place: number };

/** How the fields of satellite.js's records go into those of its module. */
type Layout = {
  readonly fields: Record<'double' | 'int' | 'char', readonly OwnField[]>;
  readonly nearEarthDoubles: readonly OwnField[];
  readonly earth: readonly { readonly place: number; readonly value: number }[];
};

let known: Layout | undefined;

/** @throws Error where the module's records are laid out otherwise than this was written for */
function layoutFor(record: SatRec): Layout {
  known ??= layoutOf(sgp4Module(), record);
  return known;
}

function layoutOf({ recordBytes, recordFields }: Sgp4Module, record: SatRec): Layout {
  if (recordBytes % 8 !== 0) throw new Error(`satellite.js: records of ${recordBytes} bytes`);
  const [first, last] = DEEP_SPACE.map((name) => recordFields.findIndex((field) => field.name === name));
  const own = recordFields
    .map((field, k) => ({
      ...field,
      key: RENAMED[field.name] ?? field.name,
      place: field.offset / 8,
      isDeepSpace: k >= first && k <= last && field.name !== NOT_DEEP_SPACE,
    }))
    .filter(({ key }) => Object.hasOwn(record, key));
  const ofType = (type: string) => own.filter((field) => field.type === type);
  return {
    fields: { double: ofType('double'), int: ofType('int'), char: ofType('char') },
    nearEarthDoubles: ofType('double').filter(({ isDeepSpace }) => !isDeepSpace),
    earth: Object.entries(EARTH).map(([name, value]) => ({ place: placeOf(name), value })),
  };
}

function fieldOf(name: string, type: string): Field {
  const field = sgp4Module().recordFields.find((each) => each.name === name);
  if (field?.type !== type) throw new Error(`satellite.js: no ${type} ${name} in a record of its module`);
  return field;
}

const places = new Map<string, number>();

/**
 * Place of a number in a record, in doubles. `loadSgp4` must have been awaited.
 *
 * @param name as satellite.js's module has it
 */
export function placeOf(name: string): number {
  let place = places.get(name);
  if (place === undefined) {
    place = fieldOf(name, 'double').offset / 8;
    places.set(name, place);
  }
  return place;
}

/** A number of a record: in the units of SGP4, by the name that satellite.js's module has for it. */
export function recordNumber({ records, place }: PlacedRecord, name: string): number {
  return records.values[records.size * place + placeOf(name)];
}

/** As `placeOf`, of a whole number, in fours of bytes. */
export function integerPlaceOf(name: string): number {
  return fieldOf(name, 'int').offset / 4;
}

/**
 * Records of element sets that SGP4 accepts, their times counted from the first epoch. Each is gone from
 * JavaScript before the next is made: kept, they would be most of what memory holds. `loadSgp4` must have been
 * awaited.
 */
export function sgp4RecordsOf(sets: readonly MeanElements[]): Sgp4Records {
  const records = createSgp4Records(sets.length, sets[0]?.epochMs ?? 0);
  sets.forEach((set, place) => {
    laySgp4Record(records, place, sgp4RecordOf(set), set.epochMs);
  });
  return records;
}

/** Room for records, which `laySgp4Record` fills. `loadSgp4` must have been awaited. */
export function createSgp4Records(count: number, originMs: number): Sgp4Records {
  const { recordBytes } = sgp4Module();
  const buffer = new SharedArrayBuffer(recordBytes * count);
  return {
    originMs,
    values: new Float64Array(buffer),
    integers: new Int32Array(buffer),
    bytes: new Uint8Array(buffer),
    size: recordBytes / 8,
  };
}

/**
 * Lays a record for the module: satellite.js's own `setSatRecs` takes 45 microseconds, as long as some fifty
 * states.
 */
export function laySgp4Record(records: Sgp4Records, place: number, record: SatRec, epochMs: number): void {
  const layout = layoutFor(record);
  const { values, integers, bytes, size } = records;
  const from = size * place;
  const own = record as unknown as Readonly<Record<string, number | string>>;
  const doubles = record.method === 'd' ? layout.fields.double : layout.nearEarthDoubles;
  for (const field of doubles) values[from + field.place] = own[field.key] as number;
  for (const { key, offset } of layout.fields.int) integers[2 * from + offset / 4] = own[key] as number;
  for (const { key, offset } of layout.fields.char) {
    bytes[8 * from + offset] = (own[key] as string).charCodeAt(0) || 0;
  }
  for (const { place: at, value } of layout.earth) values[from + at] = value;
  layEpoch(records, place, epochMs);
}

function layEpoch({ values, size, originMs }: Sgp4Records, place: number, epochMs: number): void {
  values[size * place + placeOf('jdsatepoch')] = (epochMs - originMs) / MS_PER_DAY;
  values[size * place + placeOf('jdsatepochF')] = 0;
}

/**
 * Copies of records, their times counted from another origin.
 *
 * @param epochMs of each
 */
export function gatherRecords(
  placed: readonly PlacedRecord[],
  epochMs: ArrayLike<number>,
  originMs: number,
): Sgp4Records {
  const gathered = createSgp4Records(placed.length, originMs);
  placed.forEach(({ records, place }, k) => {
    copyRecord(records, place, gathered.values, k);
    layEpoch(gathered, k, epochMs[k]);
  });
  return gathered;
}

/** Some of the records, in the order of their places. */
export function pickRecords(records: Sgp4Records, places: Int32Array): Sgp4Records {
  const picked = createSgp4Records(places.length, records.originMs);
  places.forEach((place, k) => {
    copyRecord(records, place, picked.values, k);
  });
  return picked;
}

/** Copies a record to where `values` holds record number `index`, those before it included. */
export function copyRecord(
  { values, size }: Sgp4Records,
  place: number,
  into: Float64Array,
  index: number,
): void {
  into.set(values.subarray(size * place, size * (place + 1)), size * index);
}

/** Whether SGP4 treats the orbit as deep-space: with the Moon, the Sun and resonances. */
export function isDeepSpace({ bytes, size }: Sgp4Records, place: number): boolean {
  deepSpaceByte ??= fieldOf('method', 'char').offset;
  return bytes[8 * size * place + deepSpaceByte] === DEEP_SPACE_METHOD;
}

let deepSpaceByte: number | undefined;
