import { EARTH_RADIUS_KM } from '../../elements/orbit.js';
import {
  COMPANION_LIMIT_KM,
  COMPANION_SPEED_KM_PER_S,
  type Companions,
  findCompanions,
} from '../../encounters/companions.js';
import { searchObjectsOf } from '../../encounters/search-problem.js';
import { EARTH_MU_KM3_PER_S2 } from '../../ephemeris/gravity.js';
import type { ScreenedObject } from '../screened-object.js';
import { groupBy } from './group-by.js';

/** The first day decides: later a prediction and fresh elements of the same object drift apart. */
const FIRST_STRETCH_MS = 86_400_000;
/** Osculating elements swing about mean ones by less than this. */
const SWING_KM = 40;
const SWING_RAD = 0.005;

/** One object of the batch and one of fleet or catalog that fly together in its first day; indices into all objects. */
export type FlyingAlong = Companions;

/**
 * Objects of fleet and catalog that fly along with the batch: from the first moment of an object of the
 * batch on, for a day or to the end of its phase, within the distance of companions and slower than 10 m/s.
 * They are the object itself under a number, the stage that brought it, or a neighbor in its orbit; as
 * encounters they would be told a hundred times.
 *
 * @param objects primaries (phases of the batch), then the others; `validToMs` not after the end of the window
 */
export function findFlyingAlong(
  objects: readonly ScreenedObject[],
  primaryCount: number,
  missKm: number,
): FlyingAlong[] {
  const limitKm = Math.max(COMPANION_LIMIT_KM, 2 * missKm);
  const others = Array.from({ length: objects.length - primaryCount }, (_, k) => primaryCount + k);
  const primaries = Array.from({ length: primaryCount }, (_, k) => k);
  const found: FlyingAlong[] = [];
  const endOf = ({ validFromMs, validToMs }: ScreenedObject) =>
    Math.min(validFromMs + FIRST_STRETCH_MS, validToMs);
  const groups = groupBy(primaries, (k) => `${objects[k].validFromMs} ${endOf(objects[k])}`);
  for (const group of groups.values()) {
    const like = orbitTest(
      group.map((k) => objects[k]),
      limitKm,
    );
    const near = others.filter((k) => like(objects[k]));
    if (near.length === 0) continue;
    const indices = [...group, ...near];
    const searched = searchObjectsOf(
      indices.map((k) => ({
        ...objects[k].set,
        validFromMs: objects[k].validFromMs,
        validToMs: objects[k].validToMs,
      })),
      group.length,
      indices.map((k) => objects[k].record),
    );
    const pairs = findCompanions(searched, {
      startMs: objects[group[0]].validFromMs,
      endMs: endOf(objects[group[0]]),
      missKm,
      withinPrimaries: false,
      skippedPairs: new Set(),
    });
    for (const pair of pairs) {
      found.push({ ...pair, first: indices[pair.first], second: indices[pair.second] });
    }
  }
  return found;
}

/**
 * Of those that fly along, the pairs that are probably one object: each object of the batch and each of the
 * catalog at most once, those that stay closest together first.
 */
export function probablySame(
  flying: readonly FlyingAlong[],
  objects: readonly ScreenedObject[],
): FlyingAlong[] {
  const taken = new Set<string>();
  return flying
    .toSorted((a, b) => a.farthestKm - b.farthestKm || a.first - b.first || a.second - b.second)
    .filter(({ first, second }) => {
      const names = [objects[first].designator, `other ${second}`];
      if (names.some((name) => taken.has(name))) return false;
      for (const name of names) taken.add(name);
      return true;
    });
}

/**
 * A quick test that lets everything pass that can be close and slow: at distance D and relative speed V the
 * planes differ by at most D / r + V / v, and the semi-major axes by at most 2 a^2 (v V / mu + D / r^2)
 * (from the energy). It spares the flight of the whole catalog for each object of the batch.
 */
function orbitTest(batch: readonly ScreenedObject[], limitKm: number): (other: ScreenedObject) => boolean {
  const inclinations = batch.map(({ orbit }) => orbit.inclinationDeg);
  const axes = batch.map(({ orbit }) => orbit.semiMajorAxisKm);
  const perigeeKm = Math.min(...batch.map(({ orbit }) => orbit.perigeeHeightKm)) + EARTH_RADIUS_KM - SWING_KM;
  const axis = Math.max(...axes);
  const fastest = Math.sqrt(EARTH_MU_KM3_PER_S2 * (2 / perigeeKm - 1 / axis));
  const apogeeKm = 2 * axis - perigeeKm;
  const slowest = Math.sqrt(EARTH_MU_KM3_PER_S2 * (2 / apogeeKm - 1 / axis));
  const angleDeg = (limitKm / perigeeKm + COMPANION_SPEED_KM_PER_S / slowest + SWING_RAD) * (180 / Math.PI);
  const axisKm =
    2 *
      (1.1 * axis) ** 2 *
      ((fastest * COMPANION_SPEED_KM_PER_S) / EARTH_MU_KM3_PER_S2 + limitKm / perigeeKm ** 2) +
    SWING_KM;
  const [lowDeg, highDeg] = [Math.min(...inclinations) - angleDeg, Math.max(...inclinations) + angleDeg];
  const [lowKm, highKm] = [Math.min(...axes) - axisKm, Math.max(...axes) + axisKm];
  return ({ orbit }) =>
    orbit.inclinationDeg >= lowDeg &&
    orbit.inclinationDeg <= highDeg &&
    orbit.semiMajorAxisKm >= lowKm &&
    orbit.semiMajorAxisKm <= highKm;
}
