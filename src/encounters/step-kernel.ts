import { readFileSync } from 'node:fs';
import { SEGMENT_SIZE } from '../ephemeris/septic.js';
import { ORDINARY_RATE_PER_S } from './bounds.js';
import { BANDS, type CellLists, type DirectionCells } from './direction-cells.js';
import { SHELLS } from './shell.js';

/** Numbers of one record: x, y, z (km), vx, vy, vz (km/s), radius interval over the step as shell numbers. */
export const RECORD_SIZE = 8;
export const RECORD_LOW = 6;

/**
 * What becomes of an object in a step: most stay at nearly the same height and turn as circular orbits do
 * (`FLAT`), some cross many shells (`STEEP`), a few turn faster than `ORDINARY_RATE_PER_S` (`FAST`).
 */
export const FLAT = 0;
export const STEEP = 1;
export const FAST = 2;
const KINDS = 3;
/** Kind of the objects on the second side: those that are not primaries. */
export const OTHER_FLAT = KINDS + FLAT;
export const OTHER_STEEP = KINDS + STEEP;
export const OTHER_FAST = KINDS + FAST;
const GROUPS_PER_CELL = 2 * KINDS;

/** Objects whose radius can change by more in half a step are steep, km. */
const FLAT_SWING_KM = 9;
/** Pairs that are handed over at a time. */
const PAIR_ROOM = 16_384;
/** The kernel reads four objects at a time, from any place on. */
const LANES = 4;
const PAGE_BYTES = 65_536;

/** How much room the cells of the finest step take. */
export type CellRoom = { readonly cells: number; readonly rows: number; readonly listed: number };

/**
 * The inner loops of a step (`kernel/step-kernel.ts`, compiled to WebAssembly) and the memory that they work
 * on, which the arrays here are views of.
 */
export type StepKernel = {
  /** By object: its segment of the track at hand, `SEGMENT_SIZE` doubles, and where and how long that is. */
  readonly coefficients: Float64Array;
  readonly segmentStartS: Float64Array;
  readonly segmentS: Float64Array;
  /** When each object is there, seconds after the slab's start. */
  readonly fromS: Float64Array;
  readonly toS: Float64Array;
  /** A of `bounds.ts`, km/s^2. */
  readonly curvature: Float64Array;
  /** By how much the radius interval of each object is widened on either side, km. */
  readonly marginKm: Float64Array;
  /** `RECORD_SIZE` numbers an object, in single precision: what that rounds away is in eps of `bounds.ts`. */
  readonly records: Float32Array;
  /** By object, after `evaluate`: kind times the number of cells, plus its cell; -1 where it is not there. */
  readonly groups: Int32Array;
  /** Objects that are evaluated; as many as `evaluate` is told. */
  readonly candidates: Int32Array;
  /** Takes over cells of directions and the lists of cells that sweeps go along. */
  readonly layCells: (cells: DirectionCells, lists: readonly CellLists[]) => void;
  /** Evaluates the first `count` candidates in the middle of a step and sorts them by kind, cell and height. */
  readonly evaluate: (count: number, timeS: number, halfStepS: number) => void;
  /**
   * Hands over pairs of two kinds whose straight lines pass within a distance during the step.
   *
   * @param list number of one of the lists that were laid
   * @param eachOnce for a kind with itself, along a list that names cells from the own one on
   * @param every 1 for all cells; where a sample is enough, every so many are swept
   */
  readonly sweep: (
    kind1: number,
    kind2: number,
    list: number,
    eachOnce: boolean,
    every: number,
    reachKm: number,
  ) => void;
  /** Number of looks that sweeps have taken since the last call: each at one object against four. */
  readonly takeVisits: () => number;
};

type Exports = Readonly<Record<string, WebAssembly.Global>> & {
  readonly evaluate: (...values: number[]) => void;
  readonly sort: (...values: number[]) => void;
  readonly sweep: (...values: number[]) => void;
};

let compiled: WebAssembly.Module | undefined;

/** The module lies in the build also where this file runs from its source. */
function kernelModule(): WebAssembly.Module {
  compiled ??= new WebAssembly.Module(
    readFileSync(new URL('../../dist/encounters/step-kernel.wasm', import.meta.url)),
  );
  return compiled;
}

/**
 * @param primaryCount objects with a lower number are primaries
 * @param takePairs receives pairs of objects, two numbers each, in a view that it must not keep
 */
export function createStepKernel(
  objectCount: number,
  primaryCount: number,
  room: CellRoom,
  takePairs: (pairs: Int32Array) => void,
): StepKernel {
  let bytes = 0;
  const places: Record<string, number> = {};
  const reserve = (name: string, size: number) => {
    places[name] = bytes;
    bytes += 16 * Math.ceil(size / 16);
  };
  reserve('coefficients', 8 * SEGMENT_SIZE * objectCount);
  for (const name of ['segmentStartS', 'segmentS', 'fromS', 'toS', 'curvature', 'marginKm'])
    reserve(name, 8 * objectCount);
  reserve('records', 4 * RECORD_SIZE * objectCount);
  for (const name of ['groups', 'candidates', 'byHeight']) reserve(name, 4 * objectCount);
  for (const name of SORTED) reserve(name, 4 * (objectCount + LANES));
  reserve('shellStart', 4 * (SHELLS + 1));
  reserve('groupStart', 4 * (GROUPS_PER_CELL * room.cells + 1));
  reserve('groupNext', 4 * GROUPS_PER_CELL * room.cells);
  reserve('rowOfBand', 4 * (BANDS + 1));
  reserve('firstCell', 4 * room.rows);
  reserve('lastCell', 4 * room.rows);
  reserve('cellsPerOctant', 8 * room.rows);
  reserve('pairs', 8 * PAIR_ROOM);
  reserve('lists', 4 * room.listed);

  const memory = new WebAssembly.Memory({ initial: Math.ceil(bytes / PAGE_BYTES) });
  const { buffer } = memory;
  const doubles = (name: string, length: number) => new Float64Array(buffer, places[name], length);
  const integers = (name: string, length: number) => new Int32Array(buffer, places[name], length);
  const pairs = integers('pairs', 2 * PAIR_ROOM);
  const kernel = new WebAssembly.Instance(kernelModule(), {
    env: { memory, abort: () => undefined },
    'step-kernel': {
      ...places,
      pairRoom: PAIR_ROOM,
      takePairs: (count: number) => takePairs(pairs.subarray(0, 2 * count)),
    },
  }).exports as unknown as Exports;

  const lists = integers('lists', room.listed);
  let listPlaces: { start: number; cells: number }[] = [];
  let cellCount = 0;
  let halfStep = 0;
  return {
    coefficients: doubles('coefficients', SEGMENT_SIZE * objectCount),
    segmentStartS: doubles('segmentStartS', objectCount),
    segmentS: doubles('segmentS', objectCount),
    fromS: doubles('fromS', objectCount),
    toS: doubles('toS', objectCount),
    curvature: doubles('curvature', objectCount),
    marginKm: doubles('marginKm', objectCount),
    records: new Float32Array(buffer, places.records, RECORD_SIZE * objectCount),
    groups: integers('groups', objectCount),
    candidates: integers('candidates', objectCount),
    layCells: (cells, cellLists) => {
      cellCount = cells.count;
      integers('rowOfBand', BANDS + 1).set(cells.rowOfBand);
      integers('firstCell', room.rows).set(cells.firstCell);
      integers('lastCell', room.rows).set(cells.lastCell);
      doubles('cellsPerOctant', room.rows).set(cells.cellsPerOctant);
      let next = 0;
      const lay = (values: Int32Array) => {
        lists.set(values, next);
        const place = places.lists + 4 * next;
        next += values.length;
        return place;
      };
      listPlaces = cellLists.map((list) => ({ start: lay(list.start), cells: lay(list.cells) }));
    },
    evaluate: (count, timeS, halfStepS) => {
      halfStep = halfStepS;
      kernel.evaluate(
        places.candidates,
        count,
        primaryCount,
        cellCount,
        timeS,
        halfStepS,
        FLAT_SWING_KM,
        ORDINARY_RATE_PER_S,
      );
      kernel.sort(places.candidates, count, GROUPS_PER_CELL * cellCount, SHELLS);
    },
    sweep: (kind1, kind2, list, eachOnce, every, reachKm) => {
      const { start, cells } = listPlaces[list];
      kernel.sweep(kind1, kind2, cellCount, start, cells, eachOnce ? 1 : 0, every, halfStep, reachKm);
      const count = kernel.pairCount.value as number;
      if (count > 0) takePairs(pairs.subarray(0, 2 * count));
      kernel.pairCount.value = 0;
    },
    takeVisits: () => {
      const visits = kernel.visits.value as number;
      kernel.visits.value = 0;
      return visits;
    },
  };
}

/** What is in sorted order, one array each. */
const SORTED = [
  'sortedObject',
  'sortedX',
  'sortedY',
  'sortedZ',
  'sortedVx',
  'sortedVy',
  'sortedVz',
  'sortedLow',
  'sortedHigh',
];
