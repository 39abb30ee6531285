import { type MeanElements, sgp4RecordOf } from '../../src/elements/sgp4-record.js';
import { laySgp4Records, type Sgp4Records } from '../../src/ephemeris/sgp4-records.js';

/** Records of element sets, their times counted from the first epoch. `loadSgp4` must have been awaited. */
export function sgp4RecordsOf(sets: readonly MeanElements[]): Sgp4Records {
  const epochs = sets.map(({ epochMs }) => epochMs);
  return laySgp4Records(sets.map(sgp4RecordOf), epochs, epochs[0] ?? 0);
}
