import { type SigmaCurve, sigmaCurve } from '../../uncertainty/sigma-table.js';
import type { InjectionErrors } from './launch-options.js';

/**
 * One-sigma at release, radial, transverse, normal, meters. Own assumption, no source: wide on purpose, until
 * the figures of the launch vehicle take their place.
 */
export const DEFAULT_INJECTION_SIGMA_RTN_M = [1000, 3000, 1000] as const;

/**
 * Growth of the transverse one-sigma, meters a day. Own assumption, no source: what an error of 135 m (one
 * sigma) in the semi-major axis of a low orbit makes of itself: 3 pi times the error with each of some 16
 * revolutions.
 */
export const DEFAULT_INJECTION_GROWTH_M_PER_DAY = 20_000;

/** Straight lines between these ages stay within 1 percent of the law, from two hours on. */
const AGES_DAYS = [0, 0.04, 0.08, 0.12, 0.17, 0.25, 0.35, 0.5, 0.75, 1, 1.5, 2, 3, 5, 10, 30, 60];

/**
 * How the injection errors of the batch grow: an error in mean motion drives the object along its orbit, so
 * sigma_T^2 = T^2 + (growth x days since release)^2; R and N stay as they are.
 */
export function injectionCurve({ sigmaRtnM, growthMPerDay, isDefault }: InjectionErrors): SigmaCurve {
  const [r, t, n] = sigmaRtnM;
  return sigmaCurve(
    AGES_DAYS.map((ageDays) => ({
      ageDays,
      sigmaRtnM: [r, Math.hypot(t, growthMPerDay * ageDays), n] as const,
    })),
    isDefault,
    'injection errors of the batch',
  );
}
