import type { Vector3 } from '../vector.js';
import { type SigmaClassBounds, type SigmaTable, sigmaCurve } from './sigma-table.js';

/** Where a built-in figure comes from. */
export type SigmaOrigin =
  /** Flohrer, Krag, Klinkrad, "Assessment and Categorization of TLE Orbit Errors for the US SSN Catalogue", AMOS 2008. */
  | 'AMOS 2008, from memory, not checked against the paper'
  /** The same figures, for inclinations or perigees that the remembered table does not have. */
  | 'AMOS 2008 for the neighboring class, from memory, not checked against the paper'
  /** Errors in low orbit grow by something like 1 to 3 km a day along the orbit, fastest where drag is strong. */
  | 'common practice, no source'
  | 'own assumption, no source';

/** One-sigma at the epoch of the elements, by class. */
export type EpochSigma = SigmaClassBounds & {
  /** Radial, transverse, normal, meters. */
  readonly sigmaRtnM: Vector3;
  readonly origin: SigmaOrigin;
};

/** How much the transverse one-sigma grows in a day, by perigee height. */
export type SigmaGrowth = {
  readonly perigeeMinKm: number;
  readonly perigeeMaxKm: number;
  readonly transverseMPerDay: number;
  readonly origin: SigmaOrigin;
};

const REMEMBERED = 'AMOS 2008, from memory, not checked against the paper';
const NEIGHBOR = 'AMOS 2008 for the neighboring class, from memory, not checked against the paper';
const PRACTICE = 'common practice, no source';
const ASSUMED = 'own assumption, no source';

const NONE = Number.POSITIVE_INFINITY;
const CIRCULAR = 0.1;

/** Figures at epoch; perigee heights above 6378.135 km (WGS-72 equatorial radius). */
export const EPOCH_SIGMAS: readonly EpochSigma[] = [
  epoch([-NONE, 800], CIRCULAR, [0, 30], [67, 118, 75], REMEMBERED),
  epoch([-NONE, 800], CIRCULAR, [30, 60], [107, 308, 169], REMEMBERED),
  epoch([-NONE, 800], CIRCULAR, [60, NONE], [115, 517, 137], REMEMBERED),
  epoch([800, 25_000], CIRCULAR, [0, 30], [191, 256, 203], REMEMBERED),
  epoch([800, 25_000], CIRCULAR, [30, 60], [71, 228, 95], REMEMBERED),
  epoch([800, 25_000], CIRCULAR, [60, NONE], [91, 428, 114], REMEMBERED),
  epoch([25_000, NONE], CIRCULAR, [0, 30], [357, 432, 83], REMEMBERED),
  epoch([25_000, NONE], CIRCULAR, [30, NONE], [357, 432, 83], NEIGHBOR),
  // Eccentric orbits are tracked unevenly and pass through drag and the Moon's pull in one revolution:
  // several times the figures of near-circular ones.
  epoch([-NONE, NONE], NONE, [0, NONE], [1000, 2000, 600], ASSUMED),
];

/** Growth with age in near-circular orbits. */
export const CIRCULAR_GROWTHS: readonly SigmaGrowth[] = [
  growth([-NONE, 450], 3000, PRACTICE),
  growth([450, 600], 2000, PRACTICE),
  growth([600, 2000], 1000, PRACTICE),
  growth([2000, 25_000], 200, ASSUMED),
  growth([25_000, NONE], 500, ASSUMED),
];

/** Growth with age in eccentric orbits (0.1 and more). */
export const ECCENTRIC_GROWTHS: readonly SigmaGrowth[] = [
  growth([-NONE, 600], 3000, ASSUMED),
  growth([600, NONE], 1000, ASSUMED),
];

/**
 * Radial and normal growth as a part of the transverse one. Own assumption: a wrong mean motion that drives
 * the transverse error shows in the radius by about a hundredth a day, wrong eccentricity and plane by more.
 */
const RADIAL_PART = 0.1;
const NORMAL_PART = 0.05;

/** Ages of the knots, days; the last slope holds beyond. */
const AGES_DAYS = [0, 1, 2, 3, 7, 14, 30];

let built: SigmaTable | undefined;

/**
 * The built-in figures, which cover every orbit: the one-sigma at epoch, and what it has grown by since,
 * added in squares as independent errors. They are orders of magnitude, good for a first look; a table
 * made from the element sets in use takes their place.
 */
export function defaultSigmaTable(): SigmaTable {
  built ??= {
    objects: new Map(),
    classes: EPOCH_SIGMAS.flatMap((at) => {
      const growths = at.eccentricityMax === CIRCULAR ? CIRCULAR_GROWTHS : ECCENTRIC_GROWTHS;
      return growths.flatMap((by) => {
        const perigeeMinKm = Math.max(at.perigeeMinKm, by.perigeeMinKm);
        const perigeeMaxKm = Math.min(at.perigeeMaxKm, by.perigeeMaxKm);
        if (perigeeMinKm >= perigeeMaxKm) return [];
        const bounds: SigmaClassBounds = {
          perigeeMinKm,
          perigeeMaxKm,
          eccentricityMax: at.eccentricityMax,
          inclinationMinDeg: at.inclinationMinDeg,
          inclinationMaxDeg: at.inclinationMaxDeg,
        };
        const knots = AGES_DAYS.map((ageDays) => ({ ageDays, sigmaRtnM: grown(at.sigmaRtnM, by, ageDays) }));
        return [{ ...bounds, curve: sigmaCurve(knots, true, labelOf(bounds)) }];
      });
    }),
  };
  return built;
}

function grown([r, t, n]: Vector3, { transverseMPerDay }: SigmaGrowth, ageDays: number): Vector3 {
  const grownM = transverseMPerDay * ageDays;
  return [Math.hypot(r, RADIAL_PART * grownM), Math.hypot(t, grownM), Math.hypot(n, NORMAL_PART * grownM)];
}

function labelOf(bounds: SigmaClassBounds): string {
  const eccentric = bounds.eccentricityMax === CIRCULAR ? 'near-circular' : 'eccentric';
  return `built-in, ${eccentric}, perigee ${range(bounds.perigeeMinKm, bounds.perigeeMaxKm)} km, inclination ${range(bounds.inclinationMinDeg, bounds.inclinationMaxDeg)} deg`;
}

function range(low: number, high: number): string {
  if (low === -NONE) return high === NONE ? 'any' : `below ${high}`;
  return high === NONE ? `from ${low}` : `${low} to ${high}`;
}

function epoch(
  [perigeeMinKm, perigeeMaxKm]: readonly [number, number],
  eccentricityMax: number,
  [inclinationMinDeg, inclinationMaxDeg]: readonly [number, number],
  sigmaRtnM: Vector3,
  origin: SigmaOrigin,
): EpochSigma {
  return {
    perigeeMinKm,
    perigeeMaxKm,
    eccentricityMax,
    inclinationMinDeg,
    inclinationMaxDeg,
    sigmaRtnM,
    origin,
  };
}

function growth(
  [perigeeMinKm, perigeeMaxKm]: readonly [number, number],
  transverseMPerDay: number,
  origin: SigmaOrigin,
): SigmaGrowth {
  return { perigeeMinKm, perigeeMaxKm, transverseMPerDay, origin };
}
