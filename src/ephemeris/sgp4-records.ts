import { constants, type SatRec } from 'satellite.js';
import { type Field, sgp4Module } from './sgp4-module.js';

/**
 * SGP4 records as the WebAssembly module of satellite.js holds them, one after the other, in memory that threads
 * share. In JavaScript a record is some hundred numbers, each an object of its own.
 */
export type Sgp4Records = {
  readonly count: number;
  /** What the times of the records count from, milliseconds of UTC since 1970-01-01: then doubles resolve them. */
  readonly originMs: number;
  readonly values: Float64Array;
  /** Doubles a record. */
  readonly size: number;
  /** Places in a record. */
  readonly at: {
    readonly eccentricity: number;
    /** Brouwer mean motion, radians a minute. */
    readonly meanMotion: number;
    /** Time of the integrator of resonances, which 0 starts anew. */
    readonly integrated: number;
  };
};

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

/**
 * Lays records for the module. `setSatRecs` of satellite.js takes 45 microseconds a record, as long as some fifty
 * states. `loadSgp4` must have been awaited.
 *
 * @param epochMs of each record
 * @param originMs a time near those that states will be asked for
 * @throws Error where the module's records are laid out otherwise than this was written for
 */
export function laySgp4Records(
  records: readonly SatRec[],
  epochMs: ArrayLike<number>,
  originMs: number,
): Sgp4Records {
  const { recordBytes, recordFields } = sgp4Module();
  const size = recordBytes / 8;
  if (!Number.isInteger(size)) throw new Error(`satellite.js: records of ${recordBytes} bytes`);
  const buffer = new SharedArrayBuffer(recordBytes * records.length);
  const values = new Float64Array(buffer);
  const view = new DataView(buffer);
  const placeOf = (name: string): number => {
    const field = recordFields.find((each) => each.name === name);
    if (field?.type !== 'double') throw new Error(`satellite.js: no double ${name} in a record`);
    return field.offset / 8;
  };
  const at = {
    eccentricity: placeOf('ecco'),
    meanMotion: placeOf('no_unkozai'),
    integrated: placeOf('atime'),
  };
  const [epoch, epochFraction] = [placeOf('jdsatepoch'), placeOf('jdsatepochF')];
  const earth = Object.entries(EARTH).map(([name, value]) => ({ place: placeOf(name), value }));
  const fields = ownFields(recordFields, records[0]);
  const nearEarthDoubles = fields.doubles.filter(({ isDeepSpace }) => !isDeepSpace);
  records.forEach((record, index) => {
    const from = size * index;
    const own = record as unknown as Readonly<Record<string, number | string>>;
    for (const { key, place } of record.method === 'd' ? fields.doubles : nearEarthDoubles) {
      values[from + place] = own[key] as number;
    }
    for (const { key, offset } of fields.integers) view.setInt32(8 * from + offset, own[key] as number, true);
    for (const { key, offset } of fields.letters) {
      view.setUint8(8 * from + offset, (own[key] as string).charCodeAt(0) || 0);
    }
    for (const { place, value } of earth) values[from + place] = value;
    values[from + epoch] = (epochMs[index] - originMs) / MS_PER_DAY;
    values[from + epochFraction] = 0;
  });
  return { count: records.length, originMs, values, size, at };
}

/** Those of the module's fields that a record of satellite.js has. */
function ownFields(recordFields: readonly Field[], record: SatRec | undefined) {
  const [first, last] = DEEP_SPACE.map((name) => recordFields.findIndex((field) => field.name === name));
  const own = recordFields
    .map(({ name, type, offset }, k) => ({
      key: RENAMED[name] ?? name,
      type,
      offset,
      place: offset / 8,
      isDeepSpace: k >= first && k <= last && name !== NOT_DEEP_SPACE,
    }))
    .filter(({ key }) => record !== undefined && Object.hasOwn(record, key));
  const ofType = (type: string) => own.filter((field) => field.type === type);
  return { doubles: ofType('double'), integers: ofType('int'), letters: ofType('char') };
}

/** Some of the records, in the order of their places. */
export function pickRecords(records: Sgp4Records, places: Int32Array): Sgp4Records {
  const { size, values } = records;
  const picked = new Float64Array(new SharedArrayBuffer(8 * size * places.length));
  places.forEach((place, k) => {
    picked.set(values.subarray(size * place, size * (place + 1)), size * k);
  });
  return { ...records, count: places.length, values: picked };
}
