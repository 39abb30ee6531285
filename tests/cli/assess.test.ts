import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import { CAUTION } from '../../src/caution.js';
import { runInMemory } from './run-in-memory.js';

/** The worked example of CCSDS 508.0-B-1, 3.6.2. */
const EXAMPLE = fileURLToPath(new URL('../published/ccsds-508.0-B-1-example.kvn', import.meta.url));

let folder = '';
beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), 'wideberth-assess-'));
});
afterEach(() => rmSync(folder, { recursive: true }));

function rowOf(stdout: string, label: string): string[] {
  const line = stdout.split('\n').find((each) => each.startsWith(label));
  return (line ?? '').slice(label.length).trim().split(/\s+/);
}

function messageWith(change: (text: string) => string): string {
  const path = join(folder, 'message.kvn');
  writeFileSync(path, change(readFileSync(EXAMPLE, 'utf8')));
  return path;
}

describe('assess', () => {
  test('sets what the example of the standard says beside what its states give', async () => {
    const { status, stdout } = await runInMemory('assess', EXAMPLE, '--hard-body-radius', '10');
    expect(status).toBe(0);
    // Printed in 3.6.3: 715 m, 14762 m/s, radial 27.4 m; worked out from the states to the last digits.
    expect(rowOf(stdout, 'Miss distance, m')).toEqual(['715.000', '715.748']);
    expect(rowOf(stdout, 'Relative speed, m/s')).toEqual(['-', '14762.085']);
    expect(rowOf(stdout, 'Relative position R, m')).toEqual(['-', '27.364']);
    expect(stdout).toContain('Object 1: 12345 SATELLITE A, maneuverable YES');
    expect(stdout.trimEnd().endsWith(CAUTION)).toBe(true);
  });

  test('tries random errors on demand, the same ones for the same seed', async () => {
    // Errors of object 2 along its orbit cut to a fifth: a collision becomes likely enough to be met.
    const likely = messageWith((text) =>
      text
        .replaceAll(/^X +=.*$/gm, 'X = 2569.5408 [km]')
        .replaceAll(/^Y +=.*$/gm, 'Y = 2245.093614 [km]')
        .replaceAll(/^Z +=.*$/gm, 'Z = 6281.599946 [km]')
        .replaceAll(/^CT_R +=.*$/gm, 'CT_R = 0 [m**2]')
        .replaceAll(/^CN_T +=.*$/gm, 'CN_T = 0 [m**2]'),
    );
    const options = ['assess', likely, '--hard-body-radius', '40', '--monte-carlo', '2000'];
    const { stdout } = await runInMemory(...options);
    const [, figure, low, high] =
      /probability (\S+), 99 % confidence (\S+) to (\S+)/.exec(stdout)?.map(Number) ?? [];
    const foster = Number(rowOf(stdout, 'Collision probability')[1]);
    expect(figure).toBeGreaterThan(0.01);
    expect(foster).toBeGreaterThan(low);
    expect(foster).toBeLessThan(high);
    expect((await runInMemory(...options)).stdout).toBe(stdout);
    expect((await runInMemory(...options, '--seed', '2')).stdout).not.toBe(stdout);
  });

  test.each([
    ['no radius', () => ['assess', EXAMPLE], /--hard-body-radius/],
    ['no message', () => ['assess', '--hard-body-radius', '10'], /name a message/],
    ['a radius of 0', () => ['assess', EXAMPLE, '--hard-body-radius', '0'], /--hard-body-radius is 0/],
    ['no such file', () => ['assess', join(folder, 'none.kvn'), '--hard-body-radius', '10'], /none\.kvn/],
    [
      'a missing keyword',
      () => ['assess', messageWith((text) => text.replace(/^TCA.*\n/m, '')), '--hard-body-radius', '10'],
      /message\.kvn.*TCA/,
    ],
    [
      'a covariance that is none',
      () => [
        'assess',
        messageWith((text) => text.replaceAll(/^CR_R +=.*$/gm, 'CR_R = -5 [m**2]')),
        '--hard-body-radius',
        '10',
      ],
      /message\.kvn.*-5/,
    ],
  ])('says in one line what is wrong: %s', async (_, args, message) => {
    const { status, stdout, stderr } = await runInMemory(...args());
    expect({ status, stdout }).toEqual({ status: 2, stdout: '' });
    expect(stderr).toMatch(message);
    expect(stderr.trimEnd().split('\n')).toHaveLength(1);
  });
});
