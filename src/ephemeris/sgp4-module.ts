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

/** What one run of the module works on: places in its memory. */
export type Run = {
  readonly records: number;
  readonly recordCount: number;
  /** Days since the origin that the records count from, a double each. */
  readonly days: number;
  readonly dayCount: number;
  /** Three doubles for each record and time, and one byte with the error. */
  readonly positions: number;
  readonly velocities: number;
  readonly errors: number;
};

/** Writes what a run works on into a structure of the module, for `module._compute`. */
export function writeRun(place: number, run: Run): void {
  const { module, runFields } = sgp4Module();
  const view = new DataView(module.HEAP8.buffer);
  const offsetOf = (name: string): number => {
    const field = runFields.find((each) => each.name === name);
    if (field === undefined) throw new Error(`satellite.js: no field ${name} in a run of its module`);
    return place + field.offset;
  };
  const integer = (name: string, value: number) => view.setInt32(offsetOf(name), value, true);
  integer('satellitesPointer', run.records);
  integer('satellitesCount', run.recordCount);
  integer('jdaysPointer', run.days);
  integer('jdaysCount', run.dayCount);
  integer('eciPositions', run.positions);
  integer('eciVelocities', run.velocities);
  integer('sgp4Errors', run.errors);
  view.setInt8(offsetOf('communityDecayCheckEnabled'), 1);
}
