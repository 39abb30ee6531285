import type { OrbitSummary } from '../../elements/orbit.js';

/** Bounds of a class; the lower ones belong to it, the upper ones do not. */
export type OrbitClass = {
  readonly perigeeMinKm: number;
  readonly perigeeMaxKm: number;
  readonly eccentricityMax: number;
  readonly inclinationMinDeg: number;
  readonly inclinationMaxDeg: number;
};

const PERIGEES_KM = [0, 800, 25_000, 1_000_000];
const INCLINATIONS_DEG = [0, 30, 60, 180.0001];

export const ORBIT_CLASSES: readonly OrbitClass[] = [0.1, 1].flatMap((eccentricityMax) =>
  PERIGEES_KM.slice(1).flatMap((perigeeMaxKm, i) =>
    INCLINATIONS_DEG.slice(1).map((inclinationMaxDeg, j) => ({
      perigeeMinKm: PERIGEES_KM[i],
      perigeeMaxKm,
      eccentricityMax,
      inclinationMinDeg: INCLINATIONS_DEG[j],
      inclinationMaxDeg,
    })),
  ),
);

/** Index of the class in `ORBIT_CLASSES`; -1 for an orbit of none. */
export function orbitClassOf(orbit: OrbitSummary): number {
  return ORBIT_CLASSES.findIndex(
    (each) =>
      orbit.perigeeHeightKm >= each.perigeeMinKm &&
      orbit.perigeeHeightKm < each.perigeeMaxKm &&
      orbit.eccentricity < each.eccentricityMax &&
      orbit.inclinationDeg >= each.inclinationMinDeg &&
      orbit.inclinationDeg < each.inclinationMaxDeg,
  );
}
