import type { createSingleThreadRuntime, SatRec } from 'satellite.js';

type NativeModule = Awaited<ReturnType<typeof createSingleThreadRuntime>>['module'];

/** Where a field lies in the bulk propagator's record, as its own module tells. */
type Field = readonly [name: string, type: string, offset: number, size: number];

const layouts = new WeakMap<NativeModule, readonly Field[]>();

/**
 * Hands records to a bulk propagator. `setSatRecs` of satellite.js takes 45 microseconds a record, as long as
 * some fifty states; here a record is copied as a whole and only its numbers are written. What it makes of the
 * last one is compared with what `setSatRecs` makes of it, byte for byte; where they differ, all are handed over
 * by that.
 */
export function setRecords(
  propagator: { readonly setSatRecs: (records: SatRec[]) => void },
  module: NativeModule,
  records: readonly SatRec[],
): void {
  const last = records.length - 1;
  const { satrecsPointer: pointer } = propagator as unknown as { satrecsPointer: unknown };
  if (last < 2 || typeof pointer !== 'number') {
    propagator.setSatRecs([...records]);
    return;
  }
  // An array with holes has its length, but only what is there is written.
  const ends: SatRec[] = new Array(records.length);
  ends[0] = records[0];
  ends[last] = records[last];
  propagator.setSatRecs(ends);
  const size = module._get_elsetrec_size();
  const { buffer } = module.HEAP8;
  const expected = new Uint8Array(buffer, pointer + last * size, size).slice();
  writeRecords(records, new DataView(buffer, pointer, records.length * size), size, layoutOf(module));
  const written = new Uint8Array(buffer, pointer + last * size, size);
  if (!expected.every((byte, k) => byte === written[k])) propagator.setSatRecs([...records]);
}

function layoutOf(module: NativeModule): readonly Field[] {
  const known = layouts.get(module);
  if (known !== undefined) return known;
  const pointer = module._create_elsetrec_struct_layout_string_pointer();
  const text = module.UTF8ToString(pointer);
  module._free_struct_layout_string(pointer);
  const layout: readonly Field[] = JSON.parse(text);
  layouts.set(module, layout);
  return layout;
}

/** Makes each record from the first one, which is there already. */
function writeRecords(
  records: readonly SatRec[],
  view: DataView,
  size: number,
  layout: readonly Field[],
): void {
  const bytes = new Uint8Array(view.buffer, view.byteOffset, view.byteLength);
  const own = layout
    .map(([name, type, offset]) => ({ key: keyOf(name), type, offset }))
    .filter(({ key }) => Object.hasOwn(records[0], key));
  const keysOf = (type: string) => own.filter((field) => field.type === type);
  const doubles = keysOf('double');
  const integers = keysOf('int');
  const letters = keysOf('char');
  for (let k = 1; k < records.length; k++) {
    const record = records[k] as unknown as Readonly<Record<string, number | string>>;
    const base = k * size;
    bytes.copyWithin(base, 0, size);
    for (const { key, offset } of doubles) view.setFloat64(base + offset, record[key] as number, true);
    for (const { key, offset } of integers) view.setInt32(base + offset, record[key] as number, true);
    for (const { key, offset } of letters) {
      view.setInt8(base + offset, (record[key] as string).charCodeAt(0) || 0);
    }
  }
}

/** satellite.js has the mean motion without Kozai's correction under another name. */
function keyOf(name: string): string {
  return name === 'no_unkozai' ? 'no' : name;
}
