import { EARTH_RADIUS_KM } from '../../elements/orbit.js';
import {
  COMPANION_LIMIT_KM,
  COMPANION_SPEED_KM_PER_S,
  type Companions,
  type Flight,
  flightsTogether,
} from '../../encounters/companions.js';
import { EARTH_MU_KM3_PER_S2 } from '../../ephemeris/gravity.js';
import { isDeepSpace, recordNumber, type Sgp4Records } from '../../ephemeris/sgp4-records.js';
import { dot, type Vector3 } from '../../vector.js';
import type { ScreenedObject } from '../screened-object.js';
import { groupBy } from './group-by.js';

/** The first day decides: later a prediction and fresh elements of the same object drift apart. */
const FIRST_STRETCH_MS = 86_400_000;
const MS_PER_MINUTE = 60_000;
/** Osculating elements swing about mean ones by less than this. */
const SWING_KM = 40;
const SWING_RAD = 0.005;

/** One object of the batch and one of fleet or catalog that fly together in its first day; indices into all objects. */
export type FlyingAlong = Companions;

/**
 * Objects of fleet and catalog that fly along with the batch: from the first moment of an object of the
 * batch on, for a day or to the end of its phase, within the distance of companions and hardly moving against
 * it. They are the object itself under a number, the stage that brought it, or a neighbor in its orbit; as
 * encounters they would be told a hundred times.
 *
 * Hardly moving: slower than 10 m/s beside what two objects at rest to each other in the orbiting frame have,
 * which is distance times orbital rate (29 m/s at 25 km in low orbit).
 *
 * @param objects primaries (phases of the batch), then the others; `validToMs` not after the end of the window
 * @param records of the objects, in their order
 * @param missKm pairs that are never closer than this are left out: they are no encounters either
 */
export function findFlyingAlong(
  objects: readonly ScreenedObject[],
  records: Sgp4Records,
  primaryCount: number,
  missKm: number,
): FlyingAlong[] {
  const limitKm = Math.max(COMPANION_LIMIT_KM, 2 * missKm);
  const primaries = Array.from({ length: primaryCount }, (_, k) => k);
  const found: FlyingAlong[] = [];
  for (const group of groupBy(primaries, (k) => objects[k].validFromMs).values()) {
    const like = orbitTest(
      group.map((k) => objects[k]),
      limitKm,
    );
    const startMs = objects[group[0]].validFromMs;
    const near: { readonly second: number; readonly normal: Vector3 | undefined }[] = [];
    for (let second = primaryCount; second < objects.length; second++) {
      if (like(objects[second])) near.push({ second, normal: planeNormal(objects[second], startMs) });
    }
    for (const first of group) {
      const own = planeNormal(objects[first], startMs);
      for (const { second, normal } of near) {
        if (own !== undefined && normal !== undefined && dot(own, normal) < like.leastCosine) continue;
        const flight = flyTogether(objects[first], records, { first, second }, limitKm);
        if (flight !== undefined && flight.closestKm <= missKm) found.push({ first, second, ...flight });
      }
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

function flyTogether(
  object: ScreenedObject,
  records: Sgp4Records,
  pair: { readonly first: number; readonly second: number },
  limitKm: number,
): Flight | undefined {
  const startMs = object.validFromMs;
  const endMs = Math.min(startMs + FIRST_STRETCH_MS, object.validToMs);
  const rate = orbitalRate(object);
  const span = { startMs, endMs, followedToMs: endMs };
  return flightsTogether(records, [pair], span, (distanceKm) =>
    distanceKm <= limitKm ? COMPANION_SPEED_KM_PER_S + rate * distanceKm : Number.NaN,
  )[0];
}

/** At perigee, where it is highest; radians a second, with a tenth for J2 and for the swing of a relative orbit. */
function orbitalRate({ orbit }: ScreenedObject): number {
  const perigeeKm = orbit.perigeeHeightKm + EARTH_RADIUS_KM;
  return 1.1 * Math.sqrt((EARTH_MU_KM3_PER_S2 * (1 + orbit.eccentricity)) / perigeeKm ** 3);
}

/**
 * A quick test that lets everything pass that can fly along: at distance D and relative speed V the planes
 * differ by at most D / r + V / v, and the semi-major axes by at most 2 a^2 (v V / mu + D / r^2) (from the
 * energy). It spares the flight of the whole catalog for each object of the batch.
 */
function orbitTest(
  batch: readonly ScreenedObject[],
  limitKm: number,
): ((other: ScreenedObject) => boolean) & { readonly leastCosine: number } {
  const inclinations = batch.map(({ orbit }) => orbit.inclinationDeg);
  const axes = batch.map(({ orbit }) => orbit.semiMajorAxisKm);
  const perigeeKm = Math.min(...batch.map(({ orbit }) => orbit.perigeeHeightKm)) + EARTH_RADIUS_KM - SWING_KM;
  const axis = Math.max(...axes);
  const fastest = Math.sqrt(EARTH_MU_KM3_PER_S2 * (2 / perigeeKm - 1 / axis));
  const apogeeKm = 2 * axis - perigeeKm;
  const slowest = Math.sqrt(EARTH_MU_KM3_PER_S2 * (2 / apogeeKm - 1 / axis));
  const speed = COMPANION_SPEED_KM_PER_S + Math.max(...batch.map(orbitalRate)) * limitKm;
  const angle = limitKm / perigeeKm + speed / slowest + SWING_RAD;
  const angleDeg = angle * (180 / Math.PI);
  const axisKm =
    2 * (1.1 * axis) ** 2 * ((fastest * speed) / EARTH_MU_KM3_PER_S2 + limitKm / perigeeKm ** 2) + SWING_KM;
  const [lowDeg, highDeg] = [Math.min(...inclinations) - angleDeg, Math.max(...inclinations) + angleDeg];
  const [lowKm, highKm] = [Math.min(...axes) - axisKm, Math.max(...axes) + axisKm];
  const test = ({ orbit }: ScreenedObject) =>
    orbit.inclinationDeg >= lowDeg &&
    orbit.inclinationDeg <= highDeg &&
    orbit.semiMajorAxisKm >= lowKm &&
    orbit.semiMajorAxisKm <= highKm;
  return Object.assign(test, { leastCosine: Math.cos(angle) });
}

/**
 * Normal of the mean orbit plane at a time, its node moved by SGP4's own rate; `undefined` for deep-space
 * orbits, whose nodes Moon and Sun turn as well.
 */
function planeNormal(object: ScreenedObject, timeMs: number): Vector3 | undefined {
  if (isDeepSpace(object.records, object.place)) return undefined;
  const turned = (recordNumber(object, 'nodedot') * (timeMs - object.set.epochMs)) / MS_PER_MINUTE;
  const node = recordNumber(object, 'nodeo') + turned;
  const inclination = recordNumber(object, 'inclo');
  const sine = Math.sin(inclination);
  return [sine * Math.sin(node), -sine * Math.cos(node), Math.cos(inclination)];
}
