import { describe, expect, it } from 'vitest';
import { loadSgp4 } from '../../../src/ephemeris/sgp4-module.js';
import { batchObjects } from '../../../src/jobs/launch/batch-objects.js';
import { injectionCurve } from '../../../src/jobs/launch/injection-sigma.js';
import { volumeWarning } from '../../../src/jobs/launch/volume-warning.js';
import { defaultSigmaTable } from '../../../src/uncertainty/default-sigma-table.js';
import { readSigmaTable, sigmaAt } from '../../../src/uncertainty/sigma-table.js';
import { batchSet, RELEASE_MS } from './batch-sets.js';

await loadSgp4();

const DAY_MS = 86_400_000;
const INJECTION = { sigmaRtnM: [1000, 3000, 500], growthMPerDay: 20_000, isDefault: false } as const;

const object = (sigmas?: string) =>
  batchObjects(
    [
      {
        ...batchSet('B-SAT-1', { epochMs: RELEASE_MS + 3 * DAY_MS }),
        designator: 'B-SAT-1',
        releaseMs: RELEASE_MS,
        validFromMs: RELEASE_MS,
        validToMs: Number.POSITIVE_INFINITY,
      },
    ],
    {
      listed: undefined,
      sigmas: sigmas === undefined ? undefined : readSigmaTable(sigmas, 's.csv'),
      defaultSigmas: defaultSigmaTable(),
    },
    injectionCurve(INJECTION),
  );

describe('injection errors', () => {
  it.each([0, 0.02, 0.1, 0.2, 0.3, 0.6, 1, 2.5, 4, 8, 20, 45, 90])(
    'grow along the orbit as told, %d days after release',
    (days) => {
      const [r, t, n] = sigmaAt(injectionCurve(INJECTION), days);
      expect([r, n]).toEqual([1000, 500]);
      const law = Math.sqrt(3000 ** 2 + (20_000 * days) ** 2);
      expect(Math.abs(t / law - 1)).toBeLessThan(0.01);
    },
  );

  it('count from release, not from the epoch', () => {
    const [{ agesFromMs, curve, isPredicted }] = object();
    expect(agesFromMs).toBe(RELEASE_MS);
    expect(isPredicted).toBe(true);
    expect(curve.label).toBe('injection errors of the batch');
  });

  it('give way to rows of the object in a sigma table, but not to those of its class', () => {
    const header =
      'object_designator,perigee_min_km,perigee_max_km,eccentricity_max,inclination_min_deg,inclination_max_deg,age_d,sigma_r_m,sigma_t_m,sigma_n_m\n';
    const [classOnly] = object(`${header},,,,,,0,1,2,3\n`);
    expect(sigmaAt(classOnly.curve, 0)).toEqual([1000, 3000, 500]);
    const [own] = object(`${header},,,,,,0,1,2,3\nB-SAT-1,,,,,,0,10,20,30\n`);
    expect(sigmaAt(own.curve, 0)).toEqual([10, 20, 30]);
  });
});

describe('the warning of a volume that is too small', () => {
  const end = RELEASE_MS + 2 * DAY_MS;

  it('says by how much, at the end of the window', () => {
    const { warning, note } = volumeWarning(object(), { shape: 'SPHERE', missKm: 25 }, end) ?? {};
    expect(warning).toMatch(
      // Three times the root of 3^2 + 40^2 km.
      /^the screening volume reaches 25 km in transverse direction, but three sigma of B-SAT-1 are 120\.3 km at 2026-12-07T15:22:30\.000Z, 95\.3 km more \(4\.8 times as far\)/,
    );
    expect(note).toBe(
      'Clear or not, this is about the predicted orbits: three sigma of the batch grow to 120.3 km in the window, the screening volume reaches 25 km.',
    );
  });

  it('looks at each direction of a box', () => {
    const box = (...halfSizeRtnKm: [number, number, number]) =>
      volumeWarning(object(), { shape: 'BOX', halfSizeRtnKm }, end)?.warning;
    expect(box(3, 121, 1.5)).toBeUndefined();
    expect(box(2.9, 121, 1.5)).toContain('in radial direction, but three sigma of B-SAT-1 are 3.0 km');
    expect(box(3, 121, 1.4)).toContain('in normal direction');
  });

  it('is not given where the elements end earlier', () => {
    const [first] = object();
    const early = { ...first, validToMs: RELEASE_MS + 0.1 * DAY_MS };
    expect(volumeWarning([early], { shape: 'SPHERE', missKm: 25 }, end)).toBeUndefined();
  });
});
