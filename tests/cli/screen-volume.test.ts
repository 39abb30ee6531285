import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, expect, test } from 'vitest';
import { readElementFiles } from '../../src/elements/read.js';
import { twoLineFile } from '../elements/formats.js';
import {
  type BruteForcePassage,
  bruteForceEncounters,
  bruteForcePassages,
} from '../encounters/brute-force.js';
import { syntheticCatalog, USUAL_MIX } from '../synthetic/catalog.js';
import { freshFolder, ONE_WORKER, type Row, rowsOf, runCommand } from './real-command.js';

const START_MS = Date.UTC(2026, 11, 1);
const DAYS = 0.3;

const folder = freshFolder();
afterAll(folder.remove);
const at = (name: string) => join(folder.path, name);

const ms = (text: string) => Date.parse(text);

/*
 * A row stands for one closest approach: a local minimum of the distance. Its entry and exit are those of
 * the stay in the volume around it. What follows from that, besides the plain case:
 * - the closest approach may lie outside of a volume of unequal sides, with the stay before or after it;
 * - a stay with several closest approaches in it, of objects that fly along with each other, has a row for
 *   each, whose times lie within the stay;
 * - a stay without a closest approach in it or near it has none.
 */
test.concurrent.each([
  {
    shape: 'BOX',
    halfSizesKm: [30, 150, 120],
    seed: 41,
    // Trains, whose members stay in the volume of their neighbors.
    mix: { low: 0.7, eccentric: 0.1, medium: 0, geosynchronous: 0, decaying: 0.05, train: 0.15 },
  },
  { shape: 'ELLIPSOID', halfSizesKm: [30, 140, 120], seed: 42, mix: USUAL_MIX },
] as const)(
  'every stay in a $shape around a closest approach has its row with entry and exit',
  async ({ shape, halfSizesKm, seed, mix }) => {
    const drawn = syntheticCatalog({ seed, count: 120, epochMs: START_MS, mix });
    writeFileSync(at(`${shape}-fleet.tle`), twoLineFile(drawn.filter((_, i) => i % 5 === 0)));
    writeFileSync(at(`${shape}-catalog.tle`), twoLineFile(drawn.filter((_, i) => i % 5 !== 0)));
    const first = (await readElementFiles([at(`${shape}-fleet.tle`)])).sets;
    const second = (await readElementFiles([at(`${shape}-catalog.tle`)])).sets;
    const outcome = await runCommand([
      ...[
        'screen',
        '--fleet',
        at(`${shape}-fleet.tle`),
        '--catalog',
        at(`${shape}-catalog.tle`),
        '--out',
        at(shape),
      ],
      ...['--start', '2026-12-01T00:00:00Z', '--days', String(DAYS), ...ONE_WORKER],
      ...['--volume-rtn-km', halfSizesKm.join(','), '--volume-shape', shape],
    ]);
    expect(outcome.status, outcome.stderr).toBe(0);
    const rows = rowsOf(at(`${shape}/conjunctions.csv`));
    const companions = rowsOf(at(`${shape}/companions.csv`));

    const samePair = (row: Row, { i, j }: { i: number; j: number }) =>
      row.object1_designator === first[i].designator && row.object2_designator === second[j].designator;
    const window = { first, second, startMs: START_MS, endMs: START_MS + DAYS * 86_400_000 };
    const volume = { shape: shape === 'BOX' ? 'box' : 'ellipsoid', halfSizesKm } as const;
    const passages = bruteForcePassages({ ...window, volume }).filter(
      (passage) => !companions.some((pair) => samePair(pair, passage)),
    );
    const minima = bruteForceEncounters({ ...window, missKm: Math.hypot(...halfSizesKm) });

    let plain = 0;
    for (const passage of passages) {
      const { i, j, entryMs, exitMs } = passage;
      const inside = minima.filter(
        (one) => one.i === i && one.j === j && one.tcaMs >= entryMs && one.tcaMs <= exitMs,
      );
      for (const { tcaMs, missKm, relativeSpeedKmPerS } of inside) {
        const toleranceMs = relativeSpeedKmPerS > 0.1 ? 1 : 3000;
        const row = rows.find(
          (one) => samePair(one, passage) && Math.abs(ms(one.tca_utc) - tcaMs) <= toleranceMs,
        );
        expect(row, `missed: ${first[i].designator} ${second[j].designator} ${tcaMs}`).toBeDefined();
        expect(Math.abs(Number(row?.miss_distance_m) / 1000 - missKm)).toBeLessThan(1e-5);
        if (inside.length > 1 || row === undefined) continue;
        plain += 1;
        expect(Math.abs(ms(row.screen_entry_utc) - entryMs)).toBeLessThanOrEqual(1);
        expect(Math.abs(ms(row.screen_exit_utc) - exitMs)).toBeLessThanOrEqual(1);
      }
    }
    expect(plain).toBeGreaterThan(12);

    // And nothing else: the time is that of a minimum, the stay is one, or a part of one.
    const isWithin = (row: Row, { entryMs, exitMs }: BruteForcePassage) =>
      ms(row.screen_entry_utc) >= entryMs - 1 && ms(row.screen_exit_utc) <= exitMs + 1;
    for (const row of rows) {
      const label = `${row.object1_designator} ${row.object2_designator} ${row.tca_utc}`;
      const toleranceMs = Number(row.relative_speed_m_s) > 100 ? 1 : 3000;
      expect(
        minima.some((one) => samePair(row, one) && Math.abs(one.tcaMs - ms(row.tca_utc)) <= toleranceMs),
        label,
      ).toBe(true);
      expect(
        passages.some((one) => samePair(row, one) && isWithin(row, one)),
        label,
      ).toBe(true);
      expect(ms(row.screen_entry_utc)).toBeLessThan(ms(row.screen_exit_utc));
    }
  },
);
