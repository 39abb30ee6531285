import {
  createEncounterRecords,
  type EncounterRecords,
  extendRecords,
  FIELD,
} from '../../src/jobs/encounter-records.js';

/** Records that hold the figures given and zero elsewhere. */
export function recordsWith(
  encounters: readonly Partial<Record<keyof typeof FIELD, number>>[],
): EncounterRecords {
  const records = createEncounterRecords();
  for (const encounter of encounters) {
    const at = extendRecords(records, 1);
    for (const [name, value] of Object.entries(encounter)) {
      records.data[at + FIELD[name as keyof typeof FIELD]] = value;
    }
  }
  return records;
}
