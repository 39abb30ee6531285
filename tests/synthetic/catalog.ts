import type { ElementSet } from '../../src/elements/element-set.js';
import { type Random, seededRandom } from './random.js';
import { roundToTwoLine } from './two-line.js';

/** WGS-72, as SGP4 uses it. */
const EARTH_RADIUS_KM = 6378.135;
const MU_KM3_PER_S2 = 398_600.8;
const MS_PER_DAY = 86_400_000;

/**
 * Invented catalog numbers start here. Public numbers run below 100 000 and will climb from there by a few
 * thousand a year; analyst objects take 80 000 to 89 999 and Alpha-5 `T` (270 000 to 279 999); so no
 * spacecraft bears W0000 (300 000) and above, and up to Z9999 (339 999) they still fit into two lines.
 */
export const FIRST_INVENTED_DESIGNATOR = 300_000;

/** What part of a catalog each kind of orbit makes up; the weights need not add up to 1. */
export type CatalogMix = {
  /** Near-circular, perigee 260 to 1600 km, in the shells and inclinations where real catalogs cluster. */
  readonly low: number;
  /** Transfer orbits, half-day orbits like Molniya's, and others that cross many shells. */
  readonly eccentric: number;
  /** Navigation orbits. */
  readonly medium: number;
  readonly geosynchronous: number;
  /** Perigee 150 to 250 km with a sizeable drag term: some fall within days. */
  readonly decaying: number;
  /** Low satellites that trail one another by kilometers, and pairs with the very same elements. */
  readonly train: number;
};

/** Rounded shares of a whole public catalog, common practice. */
export const USUAL_MIX: CatalogMix = {
  low: 0.735,
  eccentric: 0.105,
  medium: 0.035,
  geosynchronous: 0.065,
  decaying: 0.02,
  train: 0.04,
};

export type SyntheticCatalogOptions = {
  readonly seed: number;
  readonly count: number;
  /** Usually the start of the window: element epochs lie in the days before it. */
  readonly epochMs: number;
  /** Oldest epoch, days before `epochMs`; most sets are fresher than a day. Default 5. */
  readonly oldestDays?: number;
  readonly mix?: CatalogMix;
  /** Default `FIRST_INVENTED_DESIGNATOR`; numbers follow one another. */
  readonly firstDesignator?: number;
};

type Orbit = {
  readonly perigeeKm: number;
  readonly apogeeKm: number;
  readonly inclinationDeg: number;
  readonly argumentOfPerigeeDeg: number;
  readonly bstar: number;
};

type Elements = Omit<ElementSet, 'designator' | 'name' | 'internationalDesignator' | 'source'>;

/**
 * A made-up catalog with the crowding of a real one, rounded to what two lines can hold. Numbers only: no
 * SGP4 runs here, but every set initializes and propagates at its epoch.
 */
export function syntheticCatalog(options: SyntheticCatalogOptions): ElementSet[] {
  const random = seededRandom(options.seed);
  const { oldestDays = 5, mix = USUAL_MIX, firstDesignator = FIRST_INVENTED_DESIGNATOR } = options;
  const kinds = (Object.keys(mix) as (keyof CatalogMix)[]).map((kind) => {
    // A train takes several places at one draw.
    return { kind, weight: kind === 'train' ? mix[kind] / MEAN_TRAIN_LENGTH : mix[kind] };
  });
  const sets: ElementSet[] = [];
  while (sets.length < options.count) {
    const { kind } = random.weighted(kinds);
    const ageDays = oldestDays * random.uniform() ** 3;
    const epochMs = options.epochMs - ageDays * MS_PER_DAY;
    const drawn =
      kind === 'train' ? trainElements(random, epochMs) : [elementsOf(random, ORBITS[kind](random), epochMs)];
    for (const elements of drawn.slice(0, options.count - sets.length)) {
      sets.push(elementSet(elements, firstDesignator + sets.length, sets.length));
    }
  }
  return sets;
}

export type WalkerShellOptions = {
  readonly count: number;
  readonly planes: number;
  readonly altitudeKm: number;
  readonly inclinationDeg: number;
  readonly epochMs: number;
  /** Walker's F: satellites of neighboring planes are shifted by F * 360 / count degrees. Default 1. */
  readonly phasing?: number;
  readonly firstRightAscensionDeg?: number;
  readonly firstMeanAnomalyDeg?: number;
  readonly eccentricity?: number;
  readonly bstar?: number;
  readonly firstDesignator?: number;
  /** Names are this and a number; none by default. */
  readonly namePrefix?: string;
};

/**
 * A Walker delta pattern i: count/planes/phasing (Walker, "Satellite constellations", JBIS 37, 1984): planes
 * evenly around the equator, satellites evenly around each plane.
 */
export function walkerShell(options: WalkerShellOptions): ElementSet[] {
  const { count, planes, phasing = 1, firstDesignator = FIRST_INVENTED_DESIGNATOR } = options;
  if (count % planes !== 0) throw new RangeError(`${count} satellites do not fill ${planes} planes evenly`);
  const perPlane = count / planes;
  const semiMajorAxisKm = EARTH_RADIUS_KM + options.altitudeKm;
  const digits = Math.max(2, String(count).length);
  return Array.from({ length: count }, (_, index) => {
    const plane = Math.floor(index / perPlane);
    const slot = index % perPlane;
    const set = elementSet(
      {
        epochMs: options.epochMs,
        meanMotionRevPerDay: meanMotionRevPerDay(semiMajorAxisKm),
        eccentricity: options.eccentricity ?? 0.0001,
        inclinationDeg: options.inclinationDeg,
        rightAscensionDeg: (options.firstRightAscensionDeg ?? 0) + (360 * plane) / planes,
        // Perigee at the top of the orbit and the frozen eccentricity keep heights alike, common practice.
        argumentOfPerigeeDeg: 90,
        meanAnomalyDeg:
          (options.firstMeanAnomalyDeg ?? 0) + (360 * slot) / perPlane + (360 * phasing * plane) / count,
        bstar: options.bstar ?? 0.0001,
      },
      firstDesignator + index,
      index,
    );
    if (options.namePrefix === undefined) return set;
    return { ...set, name: `${options.namePrefix} ${String(index + 1).padStart(digits, '0')}` };
  });
}

/** Kepler's third law; J2's part in the Kozai mean motion (some 0.05 %) is left out. */
export function meanMotionRevPerDay(semiMajorAxisKm: number): number {
  return (86_400 / (2 * Math.PI)) * Math.sqrt(MU_KM3_PER_S2 / semiMajorAxisKm ** 3);
}

/** The inverse of `meanMotionRevPerDay`. */
export function semiMajorAxisKm(revPerDay: number): number {
  return Math.cbrt(MU_KM3_PER_S2 / ((revPerDay * 2 * Math.PI) / 86_400) ** 2);
}

/** Perigee height above the equator, from the published mean motion. */
export function perigeeHeightKm(set: Pick<ElementSet, 'meanMotionRevPerDay' | 'eccentricity'>): number {
  return semiMajorAxisKm(set.meanMotionRevPerDay) * (1 - set.eccentricity) - EARTH_RADIUS_KM;
}

/** Apogee height above the equator, from the published mean motion. */
export function apogeeHeightKm(set: Pick<ElementSet, 'meanMotionRevPerDay' | 'eccentricity'>): number {
  return semiMajorAxisKm(set.meanMotionRevPerDay) * (1 + set.eccentricity) - EARTH_RADIUS_KM;
}

/** Inclination of a circular sun-synchronous orbit: J2 turns the node by 360 degrees a year. */
export function sunSynchronousInclinationDeg(semiMajorAxisKm: number): number {
  return (Math.acos(-((semiMajorAxisKm / 12_352) ** 3.5)) * 180) / Math.PI;
}

const MEAN_TRAIN_LENGTH = 4;

/**
 * Where low objects gather: mean height with its spread, inclination with its spread (`'sun'`:
 * sun-synchronous, spread about it), typical eccentricity. From memory, rounded.
 */
const LOW_SHELLS: readonly {
  readonly weight: number;
  readonly heightKm: number;
  readonly heightSpreadKm: number;
  readonly inclinationDeg: number | 'sun';
  readonly inclinationSpreadDeg: number;
  readonly eccentricity: number;
}[] = [
  {
    weight: 16,
    heightKm: 548,
    heightSpreadKm: 6,
    inclinationDeg: 53.1,
    inclinationSpreadDeg: 0.08,
    eccentricity: 0.00015,
  },
  {
    weight: 3,
    heightKm: 485,
    heightSpreadKm: 25,
    inclinationDeg: 43,
    inclinationSpreadDeg: 0.05,
    eccentricity: 0.0002,
  },
  {
    weight: 3,
    heightKm: 1205,
    heightSpreadKm: 6,
    inclinationDeg: 87.9,
    inclinationSpreadDeg: 0.03,
    eccentricity: 0.0002,
  },
  {
    weight: 2,
    heightKm: 780,
    heightSpreadKm: 3,
    inclinationDeg: 86.4,
    inclinationSpreadDeg: 0.02,
    eccentricity: 0.0002,
  },
  {
    weight: 3,
    heightKm: 770,
    heightSpreadKm: 90,
    inclinationDeg: 86.4,
    inclinationSpreadDeg: 0.1,
    eccentricity: 0.004,
  },
  {
    weight: 15,
    heightKm: 520,
    heightSpreadKm: 45,
    inclinationDeg: 'sun',
    inclinationSpreadDeg: 0.2,
    eccentricity: 0.0012,
  },
  {
    weight: 9,
    heightKm: 700,
    heightSpreadKm: 60,
    inclinationDeg: 'sun',
    inclinationSpreadDeg: 0.3,
    eccentricity: 0.003,
  },
  {
    weight: 15,
    heightKm: 850,
    heightSpreadKm: 90,
    inclinationDeg: 'sun',
    inclinationSpreadDeg: 0.4,
    eccentricity: 0.007,
  },
  {
    weight: 5,
    heightKm: 930,
    heightSpreadKm: 150,
    inclinationDeg: 100,
    inclinationSpreadDeg: 1.2,
    eccentricity: 0.01,
  },
  {
    weight: 8,
    heightKm: 800,
    heightSpreadKm: 90,
    inclinationDeg: 74,
    inclinationSpreadDeg: 0.06,
    eccentricity: 0.004,
  },
  {
    weight: 8,
    heightKm: 965,
    heightSpreadKm: 30,
    inclinationDeg: 82.95,
    inclinationSpreadDeg: 0.04,
    eccentricity: 0.004,
  },
  {
    weight: 2,
    heightKm: 1480,
    heightSpreadKm: 25,
    inclinationDeg: 74,
    inclinationSpreadDeg: 0.04,
    eccentricity: 0.004,
  },
  {
    weight: 3,
    heightKm: 1420,
    heightSpreadKm: 60,
    inclinationDeg: 82.6,
    inclinationSpreadDeg: 0.05,
    eccentricity: 0.005,
  },
  {
    weight: 3,
    heightKm: 840,
    heightSpreadKm: 40,
    inclinationDeg: 71,
    inclinationSpreadDeg: 0.06,
    eccentricity: 0.003,
  },
  {
    weight: 3,
    heightKm: 930,
    heightSpreadKm: 30,
    inclinationDeg: 65,
    inclinationSpreadDeg: 0.1,
    eccentricity: 0.006,
  },
  {
    weight: 1,
    heightKm: 415,
    heightSpreadKm: 15,
    inclinationDeg: 51.64,
    inclinationSpreadDeg: 0.02,
    eccentricity: 0.0006,
  },
  {
    weight: 1,
    heightKm: 650,
    heightSpreadKm: 150,
    inclinationDeg: 30,
    inclinationSpreadDeg: 8,
    eccentricity: 0.01,
  },
];

const ORBITS: Record<Exclude<keyof CatalogMix, 'train'>, (random: Random) => Orbit> = {
  low: lowOrbit,
  eccentric: eccentricOrbit,
  medium: mediumOrbit,
  geosynchronous: geosynchronousOrbit,
  decaying: decayingOrbit,
};

function lowOrbit(random: Random): Orbit {
  const shell = random.weighted(LOW_SHELLS);
  for (;;) {
    const heightKm = random.normal(shell.heightKm, shell.heightSpreadKm);
    // Both components of the eccentricity vector normal: its length is Rayleigh-distributed.
    const eccentricity = Math.hypot(
      random.normal(0, shell.eccentricity),
      random.normal(0, shell.eccentricity),
    );
    const axisKm = EARTH_RADIUS_KM + heightKm;
    const perigeeKm = heightKm - axisKm * eccentricity;
    if (perigeeKm < 260) continue;
    const mean = shell.inclinationDeg === 'sun' ? sunSynchronousInclinationDeg(axisKm) : shell.inclinationDeg;
    return {
      perigeeKm,
      apogeeKm: heightKm + axisKm * eccentricity,
      inclinationDeg: Math.abs(random.normal(mean, shell.inclinationSpreadDeg)),
      argumentOfPerigeeDeg: random.between(0, 360),
      bstar: lowBstar(random, perigeeKm),
    };
  }
}

function eccentricOrbit(random: Random): Orbit {
  const kind = random.weighted([
    { kind: 'transfer', weight: 5 },
    { kind: 'half-day', weight: 2 },
    { kind: 'other', weight: 3 },
  ]);
  if (kind.kind === 'transfer') {
    return {
      perigeeKm: random.between(260, 900),
      apogeeKm: random.between(20_000, 36_500),
      inclinationDeg: Math.abs(random.normal(random.choice([6, 7, 18, 24, 28, 47]), 1)),
      argumentOfPerigeeDeg: random.between(0, 360),
      bstar: 10 ** random.between(-4.5, -3),
    };
  }
  if (kind.kind === 'half-day') {
    const axisKm = random.normal(26_562, 20);
    const perigeeKm = random.between(500, 3_000);
    return {
      perigeeKm,
      apogeeKm: 2 * (axisKm - EARTH_RADIUS_KM) - perigeeKm,
      inclinationDeg: random.normal(63.6, 0.9),
      argumentOfPerigeeDeg: random.normal(275, 12),
      bstar: 10 ** random.between(-5, -4),
    };
  }
  return {
    perigeeKm: random.between(300, 1_500),
    apogeeKm: random.between(2_200, 18_000),
    inclinationDeg: random.choice([28, 34, 49, 63, 65, 82, 98]) + random.normal(0, 1),
    argumentOfPerigeeDeg: random.between(0, 360),
    bstar: 10 ** random.between(-4, -2.8),
  };
}

function mediumOrbit(random: Random): Orbit {
  const shell = random.choice([
    { heightKm: 19_130, inclinationDeg: 64.8 },
    { heightKm: 20_182, inclinationDeg: 55 },
    { heightKm: 21_530, inclinationDeg: 55 },
    { heightKm: 23_222, inclinationDeg: 56 },
  ]);
  const heightKm = random.normal(shell.heightKm, 60);
  const swingKm = Math.abs(random.normal(0, 120));
  return {
    perigeeKm: heightKm - swingKm,
    apogeeKm: heightKm + swingKm,
    inclinationDeg: random.normal(shell.inclinationDeg, 1.2),
    argumentOfPerigeeDeg: random.between(0, 360),
    bstar: 0,
  };
}

function geosynchronousOrbit(random: Random): Orbit {
  // Held in place near the equator, or left to drift and to tilt up to 15 degrees.
  const held = random.uniform() < 0.45;
  const heightKm = held ? random.normal(35_786, 2) : random.normal(35_900, 180);
  const swingKm = Math.abs(random.normal(0, held ? 8 : 60));
  return {
    perigeeKm: heightKm - swingKm,
    apogeeKm: heightKm + swingKm,
    inclinationDeg: held ? Math.abs(random.normal(0, 0.06)) : random.between(0.2, 15),
    argumentOfPerigeeDeg: random.between(0, 360),
    bstar: 0,
  };
}

function decayingOrbit(random: Random): Orbit {
  const perigeeKm = random.between(150, 250);
  return {
    perigeeKm,
    apogeeKm: perigeeKm + 1_200 * random.uniform() ** 3,
    inclinationDeg: random.choice([28.5, 43, 51.6, 53.1, 65, 74, 82.9, 97.5]) + random.normal(0, 0.3),
    argumentOfPerigeeDeg: random.between(0, 360),
    bstar: 10 ** random.between(-4, -2.3),
  };
}

function trainElements(random: Random, epochMs: number): Elements[] {
  const leader = elementsOf(random, lowOrbit(random), epochMs);
  if (random.uniform() < 0.2) return [leader, leader];
  const length = 2 + random.integer(6);
  const spacingKm = 10 ** random.between(0.2, 1.9);
  const spacingDeg = (spacingKm / semiMajorAxisKm(leader.meanMotionRevPerDay)) * (180 / Math.PI);
  return Array.from({ length }, (_, index) => ({
    ...leader,
    meanAnomalyDeg: leader.meanAnomalyDeg - index * spacingDeg,
    // Neighbors are not quite in step: some drift by fractions of a kilometer a day.
    meanMotionRevPerDay: leader.meanMotionRevPerDay * (1 + random.normal(0, 1e-6)),
  }));
}

/** Typical drag terms grow toward the ground; a few sets carry a negative one, as fitted sets do. */
function lowBstar(random: Random, perigeeKm: number): number {
  const typical = perigeeKm < 450 ? 6e-4 : perigeeKm < 650 ? 2e-4 : 3e-4;
  const size = typical * Math.exp(random.normal(0, 1));
  return random.uniform() < 0.03 ? -0.3 * size : size;
}

function elementsOf(random: Random, orbit: Orbit, epochMs: number): Elements {
  const axisKm = EARTH_RADIUS_KM + (orbit.perigeeKm + orbit.apogeeKm) / 2;
  return {
    epochMs,
    meanMotionRevPerDay: meanMotionRevPerDay(axisKm),
    eccentricity: (orbit.apogeeKm - orbit.perigeeKm) / (2 * axisKm),
    inclinationDeg: orbit.inclinationDeg,
    rightAscensionDeg: random.between(0, 360),
    argumentOfPerigeeDeg: orbit.argumentOfPerigeeDeg,
    meanAnomalyDeg: random.between(0, 360),
    bstar: orbit.bstar,
  };
}

function elementSet(elements: Elements, designator: number, index: number): ElementSet {
  return roundToTwoLine({
    epochMs: elements.epochMs,
    meanMotionRevPerDay: elements.meanMotionRevPerDay,
    eccentricity: elements.eccentricity,
    inclinationDeg: elements.inclinationDeg,
    rightAscensionDeg: elements.rightAscensionDeg,
    argumentOfPerigeeDeg: elements.argumentOfPerigeeDeg,
    meanAnomalyDeg: elements.meanAnomalyDeg,
    bstar: elements.bstar,
    designator: String(designator),
    name: '',
    internationalDesignator: inventedInternationalDesignator(index),
    source: { file: 'synthetic', line: index + 1, text: '' },
  });
}

/** Launch numbers from 900 up: no year has had as many launches. */
export function inventedInternationalDesignator(index: number): string {
  const letters = 'ABCDEFGHJKLMNPQRSTUVWXYZ';
  const piece = letters[Math.floor(index / 24) % 24] + letters[index % 24];
  const launch = Math.floor(index / 576);
  return `${2000 + (Math.floor(launch / 100) % 26)}-${900 + (launch % 100)}${piece}`;
}
