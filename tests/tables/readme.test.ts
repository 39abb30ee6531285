import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { CAUTION } from '../../src/caution.js';
import { REMARKS } from '../../src/probability/remarks.js';
import { CONJUNCTION_COLUMNS } from '../../src/tables/conjunctions-csv.js';

const README = readFileSync(new URL('../../README.md', import.meta.url), 'utf8');

describe('the README', () => {
  it('tells every column of conjunctions.csv in order, with unit and meaning', () => {
    const rows = CONJUNCTION_COLUMNS.map(
      ({ name, unit, meaning }) => `| \`${name}\` | ${unit} | ${meaning} |`,
    );
    expect(README).toContain(rows.join('\n'));
  });

  it('tells every remark', () => {
    const rows = Object.entries(REMARKS).map(([code, meaning]) => `| \`${code}\` | ${meaning} |`);
    expect(README).toContain(rows.join('\n'));
  });

  it('carries the caution', () => {
    expect(README.replaceAll(/\s+/g, ' ')).toContain(CAUTION);
  });
});
