import { createSingleThreadRuntime } from 'satellite.js';

/** The WebAssembly module of satellite.js. */
export type NativeModule = Awaited<ReturnType<typeof createSingleThreadRuntime>>['module'];

/** Where a field lies in a structure of the module, bytes from its start. */
export type Field = { readonly name: string; readonly type: string; readonly offset: number };

/** SGP4 in WebAssembly, and how its structures are laid out as it tells itself. */
export type Sgp4Module = {
  readonly module: NativeModule;
  /** Of one record of an orbit. */
  readonly recordBytes: number;
  readonly recordFields: readonly Field[];
  readonly runBytes: number;
  readonly runFields: readonly Field[];
};

let loaded: Sgp4Module | undefined;

/** Loads the module once for this thread. */
export async function loadSgp4(): Promise<void> {
  if (loaded !== undefined) return;
  const { module } = await createSingleThreadRuntime();
  loaded = {
    module,
    recordBytes: module._get_elsetrec_size(),
    recordFields: fieldsOf(module, module._create_elsetrec_struct_layout_string_pointer()),
    runBytes: module._get_rundata_size(),
    runFields: fieldsOf(module, module._create_rundata_struct_layout_string_pointer()),
  };
}

/** @throws Error where `loadSgp4` has not been awaited in this thread */
export function sgp4Module(): Sgp4Module {
  if (loaded === undefined) throw new Error('loadSgp4() has not been awaited in this thread');
  return loaded;
}

function fieldsOf(module: NativeModule, pointer: number): Field[] {
  const layout: readonly (readonly [string, string, number])[] = JSON.parse(module.UTF8ToString(pointer));
  module._free_struct_layout_string(pointer);
  return layout.map(([name, type, offset]) => ({ name, type, offset }));
}

/** Memory of the module in which states of some records at some times are worked out, all places in bytes. */
export type Room = {
  /** The structure that tells `module._compute` of the others. */
  readonly run: number;
  readonly records: number;
  readonly recordCount: number;
  /** Days since the origin that the records count from, a double each. */
  readonly days: number;
  readonly dayCount: number;
  /** Three doubles for each record and time, the velocities right after the positions; one byte with the error. */
  readonly positions: number;
  readonly velocities: number;
  readonly errors: number;
};

/** @param dayCount most times that states will be asked for at once */
export function createRoom(recordCount: number, dayCount: number): Room {
  const { module, recordBytes, runBytes } = sgp4Module();
  const states = recordCount * dayCount;
  const positions = module._malloc(Math.max(1, 49 * states));
  const room: Room = {
    run: module._calloc_one(runBytes),
    records: module._malloc(Math.max(1, recordBytes * recordCount)),
    recordCount,
    days: module._malloc(8 * dayCount),
    dayCount,
    positions,
    velocities: positions + 24 * states,
    errors: positions + 48 * states,
  };
  writeRun(room, dayCount);
  return room;
}

export function freeRoom({ run, records, days, positions }: Room): void {
  const { module } = sgp4Module();
  for (const place of [run, records, days, positions]) module._free(place);
}

/** Readies the next run of a room for as many of its times. */
export function writeRun(room: Room, dayCount: number): void {
  const { module, runFields } = sgp4Module();
  const view = new DataView(module.HEAP8.buffer);
  const offsetOf = (name: string): number => {
    const field = runFields.find((each) => each.name === name);
    if (field === undefined) throw new Error(`satellite.js: no field ${name} in a run of its module`);
    return room.run + field.offset;
  };
  const integer = (name: string, value: number) => view.setInt32(offsetOf(name), value, true);
  integer('satellitesPointer', room.records);
  integer('satellitesCount', room.recordCount);
  integer('jdaysPointer', room.days);
  integer('jdaysCount', dayCount);
  integer('eciPositions', room.positions);
  integer('eciVelocities', room.velocities);
  integer('sgp4Errors', room.errors);
  view.setInt8(offsetOf('communityDecayCheckEnabled'), 1);
}
