import type { PairTrend } from '../../tables/batch-pairs-csv.js';
import { distanceAt, type FollowedPair } from './follow-pairs.js';

const SAMPLES = 48;
/** A mean distance that changes by less than this part of itself is called steady. */
const STEADY_PART = 0.001;
const MS_PER_DAY = 86_400_000;

/**
 * Whether a pair drifts apart: its mean distance over the last revolution against the one before. Over whole
 * revolutions the swing of the relative orbit cancels; a common time shorter than two of them is halved.
 *
 * @param periodS of the longer orbit
 */
export function pairTrend(
  { lastStretch }: FollowedPair,
  periodS: number,
): { readonly trend: PairTrend; readonly kmPerDay: number } {
  const { first, second, fromMs, toMs } = lastStretch;
  const spanMs = Math.min(periodS * 1000, (toMs - fromMs) / 2);
  if (!(spanMs > 0)) return { trend: 'STEADY', kmPerDay: 0 };
  const mean = (startMs: number) => {
    let sum = 0;
    for (let k = 0; k < SAMPLES; k++) {
      sum += distanceAt([first, second], startMs + (spanMs * (k + 0.5)) / SAMPLES);
    }
    return sum / SAMPLES;
  };
  const before = mean(toMs - 2 * spanMs);
  const after = mean(toMs - spanMs);
  const kmPerDay = ((after - before) / spanMs) * MS_PER_DAY;
  if (Math.abs(after - before) < STEADY_PART * before) return { trend: 'STEADY', kmPerDay };
  return { trend: after > before ? 'OPENING' : 'CLOSING', kmPerDay };
}
