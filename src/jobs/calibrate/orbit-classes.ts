import type { MeanElements } from '../../elements/sgp4-record.js';

const EARTH_RADIUS_KM = 6378.135;
const MU_KM3_PER_S2 = 398_600.8;
const SECONDS_PER_DAY = 86_400;

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
export function orbitClassOf(set: MeanElements): number {
  const radiansPerSecond = (set.meanMotionRevPerDay * 2 * Math.PI) / SECONDS_PER_DAY;
  const semiMajorAxisKm = Math.cbrt(MU_KM3_PER_S2 / radiansPerSecond ** 2);
  const perigeeKm = semiMajorAxisKm * (1 - set.eccentricity) - EARTH_RADIUS_KM;
  return ORBIT_CLASSES.findIndex(
    (each) =>
      perigeeKm >= each.perigeeMinKm &&
      perigeeKm < each.perigeeMaxKm &&
      set.eccentricity < each.eccentricityMax &&
      set.inclinationDeg >= each.inclinationMinDeg &&
      set.inclinationDeg < each.inclinationMaxDeg,
  );
}
