import { describe, expect, it } from 'vitest';
import {
  batchDesignatorOfName,
  batchDesignatorOfPlace,
  isBatchDesignator,
  parseDesignator,
} from '../../src/elements/batch-designator.js';

describe('designators of a launch batch', () => {
  it.each([
    ['QUILLMERE C 01', 1, 'B-QUILLMERE-C-01'],
    ['quillmere  c_01 ', 1, 'B-QUILLMERE-C-01'],
    ['(7)', 1, 'B-7'],
    ['00042', 1, 'B-00042'],
    ['Étoile 3', 2, 'B-ÉTOILE-3.2'],
    ['E\u0301toile 3', 2, 'B-ÉTOILE-3.2'],
    ['X.2', 1, 'B-X-2'],
  ])('%j, number %i of its name, is %s', (name, repeat, expected) => {
    const designator = batchDesignatorOfName(name, repeat);
    expect(designator).toBe(expected);
    expect(isBatchDesignator(expected)).toBe(true);
    expect(parseDesignator(expected)).toBe(expected);
  });

  it('say nothing of a name without letters and digits', () => {
    expect(batchDesignatorOfName('--- /')).toBeUndefined();
  });

  it('of a place are never those of a name, or a number', () => {
    expect(batchDesignatorOfPlace(7)).toBe('B-#7');
    expect(batchDesignatorOfName('#7')).toBe('B-7');
    expect(isBatchDesignator('B-#7')).toBe(true);
    expect(parseDesignator('B-#7')).toBe('B-#7');
  });

  it.each(['', 'B-', 'B--7', 'B-7-', 'B-#', 'b-7', 'B-A B', 'B-#7.2', '=B-7'])('%j is none', (text) => {
    expect(isBatchDesignator(text)).toBe(false);
    expect(parseDesignator(text)).toBeUndefined();
  });

  it('leave catalog numbers what they are', () => {
    expect(isBatchDesignator('90001')).toBe(false);
    expect(parseDesignator('A0001')).toBe('100001');
  });
});
