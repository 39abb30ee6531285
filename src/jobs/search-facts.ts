import { COMPANION_LIMIT_KM } from '../encounters/companions.js';
import { enclosingRadiusKm, type ScreeningVolume } from '../encounters/volume.js';
import { SLAB_S } from '../ephemeris/node-spacing.js';
import { DEFAULT_HARD_BODY_RADIUS_M } from '../uncertainty/objects.js';
import type { SearchOutcome } from './search-in-workers.js';

/** How a run searched, for its record; figures of the interpolation touch the search alone, results are on SGP4. */
export function searchFacts(
  outcome: SearchOutcome,
  volume: ScreeningVolume,
): Readonly<Record<string, number | string | null>> {
  const radiusKm = enclosingRadiusKm(volume);
  return {
    propagator: 'SGP4 with WGS-72 constants (satellite.js)',
    volumeShape: volume.shape,
    enclosingRadiusKm: radiusKm,
    slabS: SLAB_S,
    slabs: outcome.slabs,
    shortestStepS: outcome.shortestStepS ?? null,
    longestStepS: outcome.longestStepS ?? null,
    worstInterpolationKm: outcome.worstDefectKm,
    companionLimitKm: Math.max(COMPANION_LIMIT_KM, 2 * radiusKm),
    defaultHardBodyRadiusM: DEFAULT_HARD_BODY_RADIUS_M,
  };
}
