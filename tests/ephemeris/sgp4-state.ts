import { checkForDecay, type SatRec, sgp4 } from 'satellite.js';

const MS_PER_MINUTE = 60_000;

/**
 * The true SGP4 state at one time: minutes are counted from the set's own epoch in milliseconds, which
 * resolves nanoseconds (a Julian date in one double resolves 40 microseconds, 0.3 m in low orbit).
 *
 * @param out x, y, z (km) and vx, vy, vz (km/s), TEME, from `offset` on
 * @returns false when SGP4 gives no state, or one of an orbit that its drag term has long eaten up
 */
export function sgp4StateAt(
  record: SatRec,
  epochMs: number,
  timeMs: number,
  out: Float64Array,
  offset = 0,
): boolean {
  const state = sgp4(record, (timeMs - epochMs) / MS_PER_MINUTE);
  if (state === null || checkForDecay(record)) return false;
  const { position, velocity } = state;
  out[offset] = position.x;
  out[offset + 1] = position.y;
  out[offset + 2] = position.z;
  out[offset + 3] = velocity.x;
  out[offset + 4] = velocity.y;
  out[offset + 5] = velocity.z;
  return Number.isFinite(position.x + position.y + position.z + velocity.x + velocity.y + velocity.z);
}
