import { CAUTION, LAUNCH_CAUTION } from '../caution.js';
import { type CsvColumn, textCell } from './csv-text.js';

type Named = { readonly designator: string; readonly name: string };

/** Who met whom, for tables whose rows have both objects with designator and name. */
export const OBJECT_COLUMNS: readonly CsvColumn<{ readonly object1: Named; readonly object2: Named }>[] = [
  {
    name: 'object1_designator',
    unit: '',
    meaning: 'Catalog number of object 1, in decimal',
    cell: (row) => textCell(row.object1.designator),
  },
  {
    name: 'object1_name',
    unit: '',
    meaning: 'Name of object 1, empty if the elements give none',
    cell: (row) => textCell(row.object1.name),
  },
  {
    name: 'object2_designator',
    unit: '',
    meaning: 'Catalog number of object 2, in decimal',
    cell: (row) => textCell(row.object2.designator),
  },
  {
    name: 'object2_name',
    unit: '',
    meaning: 'Name of object 2, empty if the elements give none',
    cell: (row) => textCell(row.object2.name),
  },
];

/** Stands in every table. */
export const CAUTION_COLUMN = cautionColumn(CAUTION);

/** Stands in every table about a launch. */
export const LAUNCH_CAUTION_COLUMN = cautionColumn(LAUNCH_CAUTION);

function cautionColumn(caution: string): CsvColumn<unknown> {
  const cell = textCell(caution);
  return {
    name: 'caution',
    unit: '',
    meaning: 'What the figures are, and where to decide',
    cell: () => cell,
  };
}
