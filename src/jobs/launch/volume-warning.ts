import { formatUtc } from '../../elements/utc.js';
import type { ScreeningVolume } from '../../encounters/volume.js';
import { sigmaAt } from '../../uncertainty/sigma-table.js';
import type { ScreenedObject } from '../screened-object.js';

const MS_PER_DAY = 86_400_000;
const SIGMAS = 3;
const AXES = ['radial', 'transverse', 'normal'] as const;

/**
 * Warns where the screening volume is smaller than three sigma of the batch at the end of the window: then an
 * object that is off by no more than must be expected passes by outside of it.
 *
 * @param batch phases of the nominal launch
 * @returns words for the log and, shorter, for beside the verdict; `undefined` where the volume is large enough
 */
export function volumeWarning(
  batch: readonly ScreenedObject[],
  volume: ScreeningVolume,
  windowEndMs: number,
): { readonly warning: string; readonly note: string } | undefined {
  const halfSizeKm =
    volume.shape === 'SPHERE' ? [volume.missKm, volume.missKm, volume.missKm] : volume.halfSizeRtnKm;
  let worst: { object: ScreenedObject; endMs: number; axis: number; threeSigmaKm: number } | undefined;
  for (const object of batch) {
    const endMs = Math.min(object.validToMs, windowEndMs);
    const sigmas = sigmaAt(object.curve, (endMs - object.agesFromMs) / MS_PER_DAY);
    for (const [axis, sigmaM] of sigmas.entries()) {
      const threeSigmaKm = (SIGMAS * sigmaM) / 1000;
      const ratio = threeSigmaKm / halfSizeKm[axis];
      if (ratio <= 1) continue;
      if (worst === undefined || ratio > worst.threeSigmaKm / halfSizeKm[worst.axis]) {
        worst = { object, endMs, axis, threeSigmaKm };
      }
    }
  }
  if (worst === undefined) return undefined;
  const { object, endMs, axis, threeSigmaKm } = worst;
  const reachKm = halfSizeKm[axis];
  const note = `Clear or not, this is about the predicted orbits: three sigma of the batch grow to ${threeSigmaKm.toFixed(1)} km in the window, the screening volume reaches ${reachKm} km.`;
  const warning = `the screening volume reaches ${reachKm} km in ${AXES[axis]} direction, but three sigma of ${object.designator} are ${threeSigmaKm.toFixed(1)} km at ${formatUtc(endMs)}, ${(threeSigmaKm - reachKm).toFixed(1)} km more (${(threeSigmaKm / reachKm).toFixed(1)} times as far): objects that may be met then are not listed; give a larger --miss-km or --volume-rtn-km, fewer --days, or the injection errors of your launch vehicle`;
  return { warning, note };
}
