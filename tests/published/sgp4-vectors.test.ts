import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { type SatRec, sgp4 } from 'satellite.js';
import { beforeAll, describe, expect, it } from 'vitest';
import type { ElementSet, UnusedElements } from '../../src/elements/element-set.js';
import { sgp4RecordOf } from '../../src/elements/sgp4-record.js';
import { elementLineChecksum } from '../../src/elements/two-line.js';
import { recordStateAt } from '../../src/ephemeris/record-states.js';
import { loadSgp4 } from '../../src/ephemeris/sgp4-module.js';
import { createSgp4Records, laySgp4Record } from '../../src/ephemeris/sgp4-records.js';
import { readText } from '../elements/formats.js';

// Element sets and states: Vallado, Crawford, Hujsak, Kelso, "Revisiting Spacetrack Report #3",
// AIAA 2006-6753. Line 2 of a set goes on with start, stop and step in minutes.

type Row = { readonly minutes: number; readonly state: readonly number[] };
type Case = {
  readonly number: string;
  readonly set: ElementSet | undefined;
  readonly rejection: string | undefined;
  readonly rows: readonly Row[];
  readonly stopMinutes: number;
  readonly stepMinutes: number;
};

const read = (name: string) => readFileSync(fileURLToPath(new URL(name, import.meta.url)), 'utf8');

/** Three sets carry checksums of elements they no longer have; the states are for the elements. */
function withChecksums(text: string): string {
  return text
    .split(/\r?\n/)
    .map((line) =>
      /^[12] \d{5}/.test(line) ? line.slice(0, 68) + elementLineChecksum(line) + line.slice(69) : line,
    )
    .join('\n');
}

function publishedStates(): Row[][] {
  const blocks: Row[][] = [];
  for (const line of read('sgp4-verification-output.txt').split('\n')) {
    const columns = line.trim().split(/\s+/);
    if (columns[1] === 'xx') blocks.push([]);
    else if (columns.length >= 7) {
      blocks.at(-1)?.push({ minutes: Number(columns[0]), state: columns.slice(1, 7).map(Number) });
    }
  }
  return blocks;
}

async function cases(): Promise<Case[]> {
  const { sets, rejected } = await readText(withChecksums(read('sgp4-verification.tle')));
  const records: (ElementSet | UnusedElements)[] = [...sets, ...rejected];
  records.sort((a, b) => a.source.line - b.source.line);
  const blocks = publishedStates();
  expect(records.length).toBe(blocks.length);
  return records.map((record, i) => {
    const span = record.source.text.split('\n')[1].slice(69).trim().split(/\s+/).map(Number);
    return {
      number: record.designator,
      set: 'reason' in record ? undefined : record,
      rejection: 'reason' in record ? record.detail : undefined,
      rows: blocks[i],
      stopMinutes: span[1],
      stepMinutes: span[2],
    };
  });
}

/** Largest difference of any component over all rows, by both ways to a state: JavaScript and WebAssembly. */
function largestDifferences(record: SatRec, rows: readonly Row[]): { km: number; kmPerS: number } {
  let km = 0;
  let kmPerS = 0;
  // Times of the verification count from the epoch.
  const records = createSgp4Records(1, 0);
  laySgp4Record(records, 0, record, 0);
  const compiled = new Float64Array(6);
  for (const { minutes, state } of rows) {
    const found = sgp4(record, minutes);
    if (found === null || !recordStateAt(records, 0, 60_000 * minutes, compiled)) {
      throw new Error(`no state at ${minutes} minutes, error ${record.error}`);
    }
    const { position, velocity } = found;
    for (const [x, y, z, vx, vy, vz] of [
      [position.x, position.y, position.z, velocity.x, velocity.y, velocity.z],
      compiled,
    ]) {
      for (const [i, value] of [x, y, z].entries()) km = Math.max(km, Math.abs(value - state[i]));
      for (const [i, value] of [vx, vy, vz].entries()) {
        kmPerS = Math.max(kmPerS, Math.abs(value - state[3 + i]));
      }
    }
  }
  return { km, kmPerS };
}

beforeAll(loadSgp4);

/** The epoch as the published program kept it: a Julian date in double precision, 40 microseconds fine. */
function roundedAsJulianDate(set: ElementSet): ElementSet {
  const days = set.epochMs / 86_400_000 + 2_440_587.5 - 2_440_587.5;
  return { ...set, epochMs: days * 86_400_000 };
}

describe('SGP4 verification vectors, through the reader', () => {
  it('are 33 sets with 667 states', async () => {
    const all = await cases();
    expect(all.length).toBe(33);
    expect(all.reduce((sum, { rows }) => sum + rows.length, 0)).toBe(667);
  });

  // Printed to 1e-8 km and 1e-9 km/s: half a unit is 5e-9 and 5e-10. Near-earth sets agree to it.
  it('near-earth sets agree to the last printed digit', async () => {
    let compared = 0;
    for (const { number, set, rows } of await cases()) {
      if (set === undefined) continue;
      const record = sgp4RecordOf(set);
      if (record.method === 'd') continue;
      const { km, kmPerS } = largestDifferences(record, rows);
      expect([number, km <= 6e-9, kmPerS <= 6e-10]).toEqual([number, true, true]);
      compared += 1;
    }
    expect(compared).toBe(9);
  });

  // Deep-space constants hang on the epoch, which the published program rounded to a Julian date in double
  // precision, up to 20 microseconds off. Measured: 8.1e-7 km for 20413 over 3.5 years, 4.3e-6 km for 23333
  // (eccentricity 0.97), 2.8e-7 km for the others at most; with an epoch rounded to a millisecond 23333 is off by
  // 3.5e-5 km.
  it('deep-space sets agree to 1e-6 km, set 23333 to 5e-6 km', async () => {
    let compared = 0;
    for (const { number, set, rows } of await cases()) {
      if (set === undefined) continue;
      const record = sgp4RecordOf(set);
      if (record.method !== 'd') continue;
      const { km, kmPerS } = largestDifferences(record, rows);
      expect([number, km <= (number === '23333' ? 5e-6 : 1e-6), kmPerS <= 2e-9]).toEqual([
        number,
        true,
        true,
      ]);
      compared += 1;
    }
    expect(compared).toBe(23);
  });

  it('what is left of the difference comes from that rounding', async () => {
    for (const { number, set, rows } of await cases()) {
      if (set === undefined) continue;
      const { km, kmPerS } = largestDifferences(sgp4RecordOf(roundedAsJulianDate(set)), rows);
      // Not reproduced to the last bit: the published program adds the date up in another order.
      expect([number, km <= 5e-7, kmPerS <= 7e-10]).toEqual([number, true, true]);
      if (number !== '20413' && number !== '23333') expect([number, km <= 2e-8]).toEqual([number, true]);
    }
  });

  it('set 33334 fails at its epoch, and is rejected', async () => {
    const failing = (await cases()).filter(({ set }) => set === undefined);
    expect(failing.map(({ number, rejection, rows }) => [number, rejection, rows.length])).toEqual([
      // Its one printed row repeats the last state of the set before.
      ['33334', 'SGP4 error 3 (perturbed eccentricity out of range) at the epoch', 1],
    ]);
  });

  it('sets whose states end before their stop fail at the next step, all others do not', async () => {
    const failed: [string, number, number][] = [];
    for (const { number, set, rows, stopMinutes, stepMinutes } of await cases()) {
      const last = rows[rows.length - 1].minutes;
      if (set === undefined || last >= stopMinutes) continue;
      const record = sgp4RecordOf(set);
      expect(sgp4(record, last + stepMinutes)).toBeNull();
      failed.push([number, last, record.error]);
    }
    expect(failed).toEqual([
      ['22312', 474.2028672, 1],
      ['28350', 1440, 1],
      ['28872', 50, 6],
      ['29141', 420, 6],
      ['33333', 20, 4],
      ['20413', 1_844_340, 6],
    ]);
  });
});
