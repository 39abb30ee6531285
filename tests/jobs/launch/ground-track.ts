import { sgp4 } from 'satellite.js';
import type { ElementSet } from '../../../src/elements/element-set.js';
import { sgp4RecordOf } from '../../../src/elements/sgp4-record.js';

/** Greenwich mean sidereal time of 1982 (Aoki et al.; in every almanac), radians; UT1 taken as UTC. */
export function siderealTime(ms: number): number {
  const days = (ms - Date.UTC(2000, 0, 1, 12)) / 86_400_000;
  const centuries = days / 36_525;
  const degrees = 280.46061837 + 360.98564736629 * days + 0.000387933 * centuries ** 2;
  return (((degrees % 360) * Math.PI) / 180 + 2 * Math.PI) % (2 * Math.PI);
}

/** Position in a frame that turns with the Earth, km. */
export function earthFixed(set: ElementSet, ms: number): [number, number, number] {
  const state = sgp4(sgp4RecordOf(set), (ms - set.epochMs) / 60_000);
  if (state === null) throw new Error(`no state at ${ms}`);
  const { x, y, z } = state.position;
  const angle = siderealTime(ms);
  return [x * Math.cos(angle) + y * Math.sin(angle), y * Math.cos(angle) - x * Math.sin(angle), z];
}
