import { describe, expect, it } from 'vitest';
import { InputError } from '../../src/input-error.js';
import { DEFAULT_HARD_BODY_RADIUS_M, propertiesOf, readObjects } from '../../src/uncertainty/objects.js';

const HEADER = 'designator,name,hard_body_radius_m,maneuverable';
const read = (...rows: string[]) => readObjects([HEADER, ...rows, ''].join('\n'), 'objects.csv');

describe('readObjects', () => {
  it('reads rows, and leaves the default in empty cells', () => {
    const objects = read('70001,"KESTREL, 1",2.5,YES', '070002,,,', 'A0003,HERON 3,,N/A');
    expect(propertiesOf(objects, '70001')).toEqual({
      name: 'KESTREL, 1',
      hardBodyRadiusM: 2.5,
      maneuverable: 'YES',
      isDefaultRadius: false,
    });
    const nothing = {
      name: undefined,
      hardBodyRadiusM: DEFAULT_HARD_BODY_RADIUS_M,
      maneuverable: 'N/A',
      isDefaultRadius: true,
    };
    expect(propertiesOf(objects, '70002')).toEqual(nothing);
    expect(propertiesOf(objects, '100003')).toEqual({ ...nothing, name: 'HERON 3' });
    expect(propertiesOf(objects, '5')).toEqual(nothing);
    expect(propertiesOf(undefined, '5')).toEqual(nothing);
  });

  it('needs no column but the designator', () => {
    const objects = readObjects('hard_body_radius_m,designator\r\n1.5,70001\r\n', 'objects.csv');
    expect(propertiesOf(objects, '70001')).toMatchObject({ hardBodyRadiusM: 1.5, maneuverable: 'N/A' });
    expect(objects.get('70001')?.line).toBe(2);
  });

  it.each([
    [
      ['SAT,,,'],
      'objects.csv:2: designator is "SAT", expected a catalog number of up to nine digits or in Alpha-5, or a designator of a launch batch such as B-NAME',
    ],
    [
      [',X,1,'],
      'objects.csv:2: designator is "", expected a catalog number of up to nine digits or in Alpha-5, or a designator of a launch batch such as B-NAME',
    ],
    [['1,,0,'], 'objects.csv:2: hard_body_radius_m is "0", expected a number of meters greater than 0'],
    [['1,,5 m,'], 'objects.csv:2: hard_body_radius_m is "5 m", expected a number of meters greater than 0'],
    [['1,,-3,'], 'objects.csv:2: hard_body_radius_m is "-3", expected a number of meters greater than 0'],
    [['1,,1,yes'], 'objects.csv:2: maneuverable is "yes", expected YES, NO, N/A or an empty cell'],
    [
      ['100003,,1,', '7,,,', 'A0003,,2,'],
      'objects.csv:4: designator A0003 is already on line 2: leave one row for each object',
    ],
    [['1,,1'], 'objects.csv:2: 3 cells, expected 4 as in the header'],
  ])('refuses %j', (rows, message) => {
    expect(() => read(...rows)).toThrow(new InputError(message));
  });

  it('refuses unknown and missing columns', () => {
    expect(() => readObjects('designator,radius\n1,2\n', 'o.csv')).toThrow(
      new InputError(
        'o.csv:1: unknown column "radius": the columns are designator,name,hard_body_radius_m,maneuverable',
      ),
    );
    expect(() => readObjects('name\nX\n', 'o.csv')).toThrow(
      new InputError('o.csv:1: column designator is missing: add it to the header'),
    );
  });
});
