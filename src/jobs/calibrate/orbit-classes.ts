import type { OrbitSummary } from '../../elements/orbit.js';
import { defaultSigmaTable } from '../../uncertainty/default-sigma-table.js';
import { covers, type SigmaClassBounds } from '../../uncertainty/sigma-table.js';

/** The classes of the built-in table, so that each one measured takes the place of one assumed. */
export const ORBIT_CLASSES: readonly SigmaClassBounds[] = defaultSigmaTable().classes.map(
  ({ perigeeMinKm, perigeeMaxKm, eccentricityMax, inclinationMinDeg, inclinationMaxDeg }) => ({
    perigeeMinKm,
    perigeeMaxKm,
    eccentricityMax,
    inclinationMinDeg,
    inclinationMaxDeg,
  }),
);

/** Index of the first class in `ORBIT_CLASSES` that covers the orbit, as a screening would choose it; -1 for none. */
export function orbitClassOf(orbit: OrbitSummary): number {
  return ORBIT_CLASSES.findIndex((bounds) => covers(bounds, orbit));
}
