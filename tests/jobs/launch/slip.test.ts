import { describe, expect, it } from 'vitest';
import { InputError } from '../../../src/input-error.js';
import { MOST_LIFTOFFS, slippedSet, slipsOf } from '../../../src/jobs/launch/slip.js';
import { stateAt } from '../../synthetic/mean-elements.js';
import { batchSet, RELEASE_MS } from './batch-sets.js';
import { earthFixed } from './ground-track.js';

const { set } = batchSet('B-A');
/** The Earth turns once: 2 pi over the IERS rate, from first principles. */
const SIDEREAL_DAY_MS = (1000 * 2 * Math.PI) / 7.292115e-5;
const MINUTE_MS = 60_000;

function distanceKm(a: readonly number[], b: readonly number[]): number {
  return Math.hypot(a[0] - b[0], a[1] - b[1], a[2] - b[2]);
}

describe('a slip', () => {
  it.each([1, -37, 61, 720, SIDEREAL_DAY_MS / MINUTE_MS])(
    'of %d minutes changes nothing as seen from the Earth, all the way up and around',
    (slipMin) => {
      const slipMs = slipMin * MINUTE_MS;
      const slipped = slippedSet(set, slipMs);
      for (const afterMin of [0, 11, 47, 93, 700, 4000]) {
        const ms = RELEASE_MS + afterMin * MINUTE_MS;
        // Sidereal time counts from the equinox, which precesses by 5 m a day here.
        expect(distanceKm(earthFixed(slipped, ms + slipMs), earthFixed(set, ms))).toBeLessThan(0.006);
      }
    },
  );

  it('of a sidereal day puts the orbit where it was in space', () => {
    const slipped = slippedSet(set, SIDEREAL_DAY_MS);
    expect(slipped.rightAscensionDeg).toBeCloseTo(set.rightAscensionDeg, 9);
    const [now, then] = [
      stateAt(set, RELEASE_MS + 5e6),
      stateAt(slipped, RELEASE_MS + 5e6 + SIDEREAL_DAY_MS),
    ];
    expect(distanceKm(now?.positionKm ?? [], then?.positionKm ?? [])).toBeLessThan(1e-5);
  });

  it('of half a sidereal day puts it on the other side', () => {
    const slipped = slippedSet(set, SIDEREAL_DAY_MS / 2);
    expect(slipped.rightAscensionDeg).toBeCloseTo(set.rightAscensionDeg - 180, 9);
    expect(slipped.epochMs).toBe(set.epochMs + SIDEREAL_DAY_MS / 2);
  });

  it('keeps the node within one turn, whatever its sign', () => {
    for (const slipMin of [-5000, -1, 1, 5000]) {
      const { rightAscensionDeg } = slippedSet({ ...set, rightAscensionDeg: 0.001 }, slipMin * MINUTE_MS);
      expect(rightAscensionDeg).toBeGreaterThanOrEqual(0);
      expect(rightAscensionDeg).toBeLessThan(360);
    }
  });
});

describe('the candidate liftoffs', () => {
  it('are the nominal one alone without a range', () => {
    expect(slipsOf(undefined)).toEqual([0]);
  });

  it('lie on the range, both ends included', () => {
    expect(slipsOf({ fromMin: -30, toMin: 30, everyMin: 1 })).toHaveLength(61);
    expect(slipsOf({ fromMin: -2, toMin: 2, everyMin: 2 })).toEqual([-120_000, 0, 120_000]);
    expect(slipsOf({ fromMin: 0, toMin: 0.3, everyMin: 0.1 })).toEqual([0, 6000, 12_000, 18_000]);
  });

  it('hold the nominal one even where the range does not', () => {
    expect(slipsOf({ fromMin: 5, toMin: 6, everyMin: 1 })).toEqual([0, 300_000, 360_000]);
    expect(slipsOf({ fromMin: -3, toMin: 3, everyMin: 4 })).toEqual([-180_000, 0, 60_000]);
  });

  it('are not without number', () => {
    expect(slipsOf({ fromMin: -720, toMin: 720, everyMin: 1 })).toHaveLength(MOST_LIFTOFFS);
    expect(() => slipsOf({ fromMin: 0, toMin: 100, everyMin: 0.01 })).toThrow(
      new InputError(
        '--slip-from 0 to --slip-to 100 every 0.01 min makes 10001 liftoffs: at most 1441 are screened at once',
      ),
    );
  });
});
