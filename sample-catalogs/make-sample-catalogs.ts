// Makes every sample file of this folder anew, byte for byte the same: npx tsx sample-catalogs/make-sample-catalogs.ts
import { mkdirSync, writeFileSync } from 'node:fs';
import { dirname, join } from 'node:path';
import { fileURLToPath } from 'node:url';
import type { ElementSet } from '../src/elements/element-set.js';
import { formatUtc } from '../src/elements/utc.js';
import { rtnFrame } from '../src/ephemeris/rtn-frame.js';
import { dot, norm, rotateBack, subtract, type Vector3 } from '../src/vector.js';
import {
  perigeeHeightKm,
  semiMajorAxisKm,
  syntheticCatalog,
  USUAL_MIX,
  walkerShell,
} from '../tests/synthetic/catalog.js';
import { type ErrorLaw, withErrors } from '../tests/synthetic/element-errors.js';
import { atEpoch, setThrough, shifted, stateAt } from '../tests/synthetic/mean-elements.js';
import { type Passing, setPassing } from '../tests/synthetic/passing-orbit.js';
import { type Random, seededRandom } from '../tests/synthetic/random.js';
import { checksum, roundToTwoLine, toThreeLine, toTwoLine } from '../tests/synthetic/two-line.js';

const MS_PER_DAY = 86_400_000;
const MS_PER_HOUR = 3_600_000;
const NIGHT_1_MS = Date.UTC(2026, 10, 30);
const NIGHT_2_MS = Date.UTC(2026, 11, 1);
const RELEASE_MS = Date.UTC(2026, 11, 5, 15, 22, 30);

const BACKGROUND_COUNT = 2800;
const BATCH_COUNT = 50;

// Numbers from 90 000 to 99 999 are kept out of the public count (from memory), those from W0000 (300 000) on
// are decades away from it: no spacecraft bears either.
const FIRST_FLEET_NUMBER = 98_001;
const FIRST_NAMED_NUMBER = 95_001;
const FIRST_UNNAMED_NUMBER = 300_001;

/** The operator's own fits, and those that a public catalog is made of; sizes from memory. */
const OWN_ERRORS: ErrorLaw = { radialM: 15, transverseM: 50, transverseMPerDay: 150, normalM: 15 };
const PUBLIC_ERRORS: ErrorLaw = { radialM: 60, transverseM: 250, transverseMPerDay: 600, normalM: 90 };

type Nights = { readonly night1: ElementSet | undefined; readonly night2: ElementSet };

/** All the sets behind the files, those of the catalog for each night. */
export function sampleSets() {
  const fleet = fleetOfBothNights();
  const batch = releasedBatch();
  const background = backgroundOfBothNights();
  const catalog = [
    ...background,
    ...ownSatellitesAsPublished(fleet),
    ...craftedEncounters(fleet),
    ...craftedForBatch(batch),
    ...oddities(fleet),
  ];
  const firstNight = (nights: readonly Nights[]) => nights.flatMap(({ night1 }) => night1 ?? []);
  const secondNight = (nights: readonly Nights[]) => nights.map(({ night2 }) => night2);
  return {
    night1: { fleet: firstNight(fleet), catalog: firstNight(catalog) },
    night2: { fleet: secondNight(fleet), catalog: secondNight(catalog) },
    superseded: supersededSets(background),
    batch,
    operating: raisedBatch(batch),
  };
}

/** Path below the folder to what the file holds. */
export function sampleCatalogs(): ReadonlyMap<string, string> {
  const { night1, night2, superseded, batch, operating } = sampleSets();
  return new Map([
    ['night-1/fleet.tle', elementFile(night1.fleet)],
    ['night-1/catalog.tle', elementFile(night1.catalog) + damagedLines(NIGHT_1_MS)],
    ['fleet.tle', elementFile(night2.fleet)],
    ['catalog.tle', elementFile([...night2.catalog, ...superseded]) + damagedLines(NIGHT_2_MS)],
    ['objects.csv', objectsCsv(night2.fleet, night2.catalog)],
    ['batch.tle', elementFile(batch)],
    ['batch-operating.tle', elementFile(operating.map(({ set }) => set))],
    ['batch-validity.csv', validityCsv(operating)],
  ]);
}

/** Writes all files below `folder`. */
export function writeSampleCatalogs(folder: string): void {
  for (const [path, text] of sampleCatalogs()) {
    mkdirSync(dirname(join(folder, path)), { recursive: true });
    writeFileSync(join(folder, path), text);
  }
}

/** Two shells: 24 satellites in four planes, 12 sun-synchronous ones in two planes. */
function fleetOfBothNights(): Nights[] {
  const random = seededRandom(101);
  const epochMs = NIGHT_2_MS - 3 * MS_PER_HOUR;
  const shells = [
    walkerShell({
      count: 24,
      planes: 4,
      phasing: 2,
      altitudeKm: 556,
      inclinationDeg: 53.4,
      epochMs,
      firstRightAscensionDeg: 17,
      bstar: 0.00018,
      firstDesignator: FIRST_FLEET_NUMBER,
      namePrefix: 'QUILLMERE A',
    }),
    walkerShell({
      count: 12,
      planes: 2,
      altitudeKm: 612,
      inclinationDeg: 97.84,
      epochMs,
      firstRightAscensionDeg: 61,
      bstar: 0.00011,
      firstDesignator: FIRST_FLEET_NUMBER + 24,
      namePrefix: 'QUILLMERE B',
    }),
  ];
  const launches = ['2025-911', '2026-904'];
  return shells.flat().map((ideal, index) => {
    const launch = launches[index < 24 ? 0 : 1];
    const letter = 'ABCDEFGHJKLMNPQRSTUVWXYZ'[index % 24];
    // Stations are kept to some kilometers and epochs are not all the same second.
    const set = {
      ...withErrors(ideal, { radialM: 300, transverseM: 3000, transverseMPerDay: 5, normalM: 800 }, random),
      internationalDesignator: `${launch}${letter}`,
      epochMs: epochMs + random.integer(1800) * 1000,
    };
    return {
      night1: moved(set, set.epochMs - MS_PER_DAY, OWN_ERRORS, random),
      night2: roundToTwoLine(set),
    };
  });
}

/** Everything else that flies: invented orbits crowded like real ones, some named. */
function backgroundOfBothNights(): Nights[] {
  const random = seededRandom(102);
  const mix = { ...USUAL_MIX, decaying: 0.004, geosynchronous: 0.04, eccentric: 0.07 };
  const sets = syntheticCatalog({ seed: 103, count: BACKGROUND_COUNT, epochMs: NIGHT_2_MS, mix });
  let named = 0;
  let before: { readonly ideal: ElementSet; readonly nights: Nights } | undefined;
  return sets.map((ideal, index) => {
    const isNamed = random.uniform() < 0.45;
    if (isNamed) named += 1;
    const set = {
      ...ideal,
      name: isNamed ? inventedName(random) : '',
      designator: String(isNamed ? FIRST_NAMED_NUMBER + named : FIRST_UNNAMED_NUMBER + index - named),
    };
    // Objects that share their elements (docked) share their errors too.
    const twin = before !== undefined && sameElements(before.ideal, ideal) ? before.nights.night1 : undefined;
    const night1 =
      twin === undefined
        ? dayBefore(set, random)
        : {
            ...twin,
            name: set.name,
            designator: set.designator,
            internationalDesignator: set.internationalDesignator,
          };
    const nights = { night1, night2: set };
    before = { ideal, nights };
    return nights;
  });
}

/** Own satellites are in the public catalog as well, with elements older and coarser than the operator's. */
function ownSatellitesAsPublished(fleet: readonly Nights[]): Nights[] {
  const random = seededRandom(104);
  return fleet.map(({ night2 }) => {
    const published = moved(
      night2,
      night2.epochMs - random.between(0.2, 0.9) * MS_PER_DAY,
      PUBLIC_ERRORS,
      random,
    );
    return {
      night1: moved(night2, published.epochMs - MS_PER_DAY, PUBLIC_ERRORS, random),
      night2: published,
    };
  });
}

type Crafted = {
  readonly fleetIndex: number;
  readonly name: string;
  readonly number: number;
  readonly tca: string;
  /** How near the passage looks with the elements of each night, meters. */
  readonly missM: readonly [night1: number, night2: number];
  readonly crossingDeg: number;
  readonly missAngleDeg: number;
  readonly orbit?: Pick<Passing, 'semiMajorAxisKm' | 'climbDeg'>;
  /** What the first night's elements had wrong: the speed along the orbit, or the plane. Default `speed`. */
  readonly wrong?: 'speed' | 'plane';
  /** Age of the elements at the start of the window; those older than a day are the same on both nights. */
  readonly ageDays?: number;
  readonly bstar?: number;
};

/** Objects that pass satellites of the fleet as chosen; from one night to the next some rise, some fall. */
export const CRAFTED: readonly Crafted[] = [
  // Rises: a kilometer and more on the first night, tens of meters on the second.
  {
    fleetIndex: 2,
    name: 'TARNWICK 1 DEB',
    number: 97_001,
    tca: '2026-12-02T07:41:13.400Z',
    missM: [1850, 70],
    crossingDeg: 98,
    missAngleDeg: 25,
    orbit: { semiMajorAxisKm: 6958, climbDeg: 0.2 },
  },
  // Falls.
  {
    fleetIndex: 9,
    name: 'CINDERLOW 4 R/B',
    number: 97_002,
    tca: '2026-12-02T19:05:47.150Z',
    missM: [240, 2100],
    crossingDeg: -95,
    missAngleDeg: 87,
    orbit: { semiMajorAxisKm: 7010, climbDeg: 0.35 },
  },
  // Stays.
  {
    fleetIndex: 15,
    name: '',
    number: 309_003,
    tca: '2026-12-03T04:12:02.800Z',
    missM: [640, 655],
    crossingDeg: 64,
    missAngleDeg: 110,
  },
  // New on the second night.
  {
    fleetIndex: 20,
    name: 'MERIDOC 7 DEB',
    number: 97_004,
    tca: '2026-12-03T16:27:31.050Z',
    missM: [5900, 2600],
    crossingDeg: 92,
    missAngleDeg: 75,
    orbit: { semiMajorAxisKm: 6990, climbDeg: -0.5 },
  },
  // Gone on the second night.
  {
    fleetIndex: 5,
    name: '',
    number: 309_005,
    tca: '2026-12-02T11:33:58.600Z',
    missM: [3600, 5900],
    crossingDeg: 77,
    missAngleDeg: 85,
    orbit: { semiMajorAxisKm: 6950, climbDeg: 0.3 },
  },
  // Past by the second night.
  {
    fleetIndex: 12,
    name: 'ELMSWORTHY 2',
    number: 97_006,
    tca: '2026-11-30T15:50:20.700Z',
    missM: [410, 430],
    crossingDeg: 109,
    missAngleDeg: 60,
  },
  // Nearly head-on, hours after the start.
  {
    fleetIndex: 17,
    name: '',
    number: 309_007,
    tca: '2026-12-01T03:18:44.250Z',
    missM: [130, 42],
    crossingDeg: 172,
    missAngleDeg: 80,
    wrong: 'plane',
  },
  // Past three days, inside seven.
  {
    fleetIndex: 23,
    name: 'STANNERTON 11',
    number: 97_008,
    tca: '2026-12-06T10:02:09.900Z',
    missM: [760, 310],
    crossingDeg: -93,
    missAngleDeg: 40,
    orbit: { semiMajorAxisKm: 7120, climbDeg: 0.9 },
  },
  // A transfer orbit at its lowest: the fastest crossing.
  {
    fleetIndex: 11,
    name: 'VELLUMER 3 R/B',
    number: 97_010,
    tca: '2026-12-03T09:20:11.300Z',
    missM: [2600, 1400],
    crossingDeg: 118,
    missAngleDeg: 65,
    orbit: { semiMajorAxisKm: 24_400, climbDeg: 2 },
    bstar: 0.0002,
  },
  // Elements twelve days old.
  {
    fleetIndex: 14,
    name: '',
    number: 309_011,
    tca: '2026-12-02T02:36:55.450Z',
    missM: [505, 505],
    crossingDeg: 88,
    missAngleDeg: 155,
    ageDays: 12,
    bstar: 0.00005,
  },
  // Over the poles, in the sun-synchronous shell.
  {
    fleetIndex: 27,
    name: 'FENWATER 9 DEB',
    number: 97_012,
    tca: '2026-12-03T22:48:27.750Z',
    missM: [430, 260],
    crossingDeg: -164,
    missAngleDeg: 75,
    wrong: 'plane',
  },
  {
    fleetIndex: 33,
    name: '',
    number: 309_013,
    tca: '2026-12-01T13:07:50.100Z',
    missM: [210, 190],
    crossingDeg: 125,
    missAngleDeg: 55,
    orbit: { semiMajorAxisKm: 7030, climbDeg: 0.3 },
  },
  // Just inside 5 km.
  {
    fleetIndex: 30,
    name: 'THORNIVER 5',
    number: 97_014,
    tca: '2026-12-03T01:55:03.350Z',
    missM: [4700, 4900],
    crossingDeg: 51,
    missAngleDeg: 80,
  },
];

/** A slow neighbor: meters a second, again and again. */
const COVER: Crafted = {
  fleetIndex: 7,
  name: 'QUILLMERE A 08 COVER',
  number: 97_009,
  tca: '2026-12-01T20:14:36.000Z',
  missM: [1200, 1200],
  crossingDeg: 0.05,
  missAngleDeg: 60,
  orbit: { climbDeg: 0.01 },
  bstar: 0.0009,
};

function craftedEncounters(fleet: readonly Nights[]): Nights[] {
  const random = seededRandom(105);
  const craft = (crafted: Crafted, index: number) => {
    const of = fleet[crafted.fleetIndex].night2;
    const ageDays = crafted.ageDays ?? random.between(0.15, 0.6);
    const { missAngleDeg, crossingDeg, orbit } = crafted;
    return setPassing(
      of,
      { tcaMs: Date.parse(crafted.tca), missM: crafted.missM[1], missAngleDeg, crossingDeg, ...orbit },
      roundToTwoLine({
        ...of,
        name: crafted.name,
        designator: String(crafted.number),
        internationalDesignator: `2019-9${String(index + 20)}C`,
        epochMs: NIGHT_2_MS - ageDays * MS_PER_DAY,
        bstar: crafted.bstar ?? 0.0002,
      }),
    );
  };
  const cover = craft(COVER, CRAFTED.length);
  return [
    ...CRAFTED.map((crafted, index) => {
      const night2 = craft(crafted, index);
      if (crafted.ageDays !== undefined) return { night1: night2, night2 };
      const of = fleet[crafted.fleetIndex].night1;
      if (of === undefined) throw new Error('the fleet flies on both nights');
      return { night1: mistakenBefore(night2, of, crafted, random), night2 };
    }),
    { night1: moved(cover, cover.epochMs - MS_PER_DAY, OWN_ERRORS, random), night2: cover },
  ];
}

/**
 * The elements of a day before, off by a little in all of them and in one by just as much as makes the passage
 * look the way it did then.
 */
function mistakenBefore(night2: ElementSet, of: ElementSet, crafted: Crafted, random: Random): ElementSet {
  const small = { radialM: 10, transverseM: 40, transverseMPerDay: 30, normalM: 15 };
  const epochMs = night2.epochMs - random.between(0.9, 1.1) * MS_PER_DAY;
  const tcaMs = Date.parse(crafted.tca);
  const near = moved(night2, epochMs, small, random);
  const axisKm = semiMajorAxisKm(near.meanMotionRevPerDay);
  const radians = ((near.meanMotionRevPerDay * 2 * Math.PI) / MS_PER_DAY) * (tcaMs - epochMs);
  const mistaken = (km: number) =>
    roundToTwoLine(
      shifted(near, {
        meanMotionShare: crafted.wrong === 'plane' ? 0 : km / axisKm / radians,
        inclinationRad: crafted.wrong === 'plane' ? km / axisKm : 0,
        eccentricityX: 0,
        eccentricityY: 0,
        nodeRad: 0,
        longitudeRad: 0,
      }),
    );
  const excessKm = (km: number) => missNearKm(of, mistaken(km), tcaMs) - crafted.missM[0] / 1000;
  const stepKm = 0.1;
  for (let steps = 0; steps < 120; steps += 1) {
    for (const from of [steps * stepKm, -(steps + 1) * stepKm]) {
      let low = from;
      let high = from + stepKm;
      const lowSign = Math.sign(excessKm(low));
      if (lowSign === Math.sign(excessKm(high))) continue;
      for (let halving = 0; halving < 12; halving += 1) {
        const middle = (low + high) / 2;
        if (Math.sign(excessKm(middle)) === lowSign) low = middle;
        else high = middle;
      }
      return mistaken(low);
    }
  }
  throw new Error(`${crafted.number}: no small mistake makes the miss ${crafted.missM[0]} m`);
}

/** Smallest distance close to a time, the motion being straight over the second or so in between. */
function missNearKm(one: ElementSet, two: ElementSet, aboutMs: number): number {
  let ms = aboutMs;
  for (let step = 0; ; step += 1) {
    const a = stateAt(one, ms);
    const b = stateAt(two, ms);
    if (a === undefined || b === undefined) throw new Error(`${two.designator} fails`);
    const position = subtract(b.positionKm, a.positionKm);
    if (step === 3) return norm(position);
    const velocity = subtract(b.velocityKmPerS, a.velocityKmPerS);
    ms -= (dot(position, velocity) / dot(velocity, velocity)) * 1000;
  }
}

/** What the batch meets on its way: a few objects that come within 25 km in the three days after release. */
function craftedForBatch(batch: readonly ElementSet[]): Nights[] {
  const random = seededRandom(106);
  const meetings: readonly [
    batchIndex: number,
    hoursAfterRelease: number,
    missM: number,
    crossingDeg: number,
  ][] = [
    [3, 7.43, 9_000, 95],
    [11, 19.18, 2_400, -118],
    [24, 30.67, 17_500, 66],
    [38, 41.9, 650, 149],
    [45, 55.32, 12_300, -80],
    [49, 68.05, 21_000, 104],
  ];
  return meetings.map(([batchIndex, hours, missM, crossingDeg], index) => {
    const template = {
      ...batch[batchIndex],
      designator: String(97_031 + index),
      name: index % 2 === 0 ? `ROWANTHWAITE ${index + 1} R/B` : `BRINDLECOMBE ${index + 3}`,
      internationalDesignator: `2014-9${41 + index}B`,
      epochMs: NIGHT_2_MS - random.between(0.1, 0.8) * MS_PER_DAY,
      bstar: 0.00004,
    };
    const night2 = setPassing(
      batch[batchIndex],
      {
        tcaMs: RELEASE_MS + hours * MS_PER_HOUR,
        missM,
        missAngleDeg: random.between(20, 160),
        crossingDeg,
        semiMajorAxisKm: 6378.135 + random.between(420, 600),
        climbDeg: random.between(-0.4, 0.4),
      },
      roundToTwoLine(template),
    );
    return { night1: dayBefore(night2, random), night2 };
  });
}

/** A docked pair, a docked tender of the fleet's own, an object long unseen, one about to fall. */
function oddities(fleet: readonly Nights[]): Nights[] {
  const random = seededRandom(107);
  const [template] = syntheticCatalog({ seed: 108, count: 1, epochMs: NIGHT_2_MS - 7 * MS_PER_HOUR });
  const station: ElementSet = roundToTwoLine({
    ...template,
    designator: '97051',
    name: 'HOLLOWBRAE STATION',
    internationalDesignator: '2018-933A',
    epochMs: NIGHT_2_MS - 5 * MS_PER_HOUR,
    meanMotionRevPerDay: 15.497,
    eccentricity: 0.0004,
    inclinationDeg: 47.2,
    bstar: 0.0003,
  });
  const docked = { designator: '97052', name: 'HOLLOWBRAE FERRY 2', internationalDesignator: '2026-917A' };
  const stationBefore = dayBefore(station, random);
  const host = fleet[6];
  const tender = {
    designator: '97053',
    name: 'QUILLMERE TENDER 1',
    internationalDesignator: '2026-921A',
  };
  const tenderErrors = { radialM: 10, transverseM: 40, transverseMPerDay: 20, normalM: 10 };
  const falling = fallingSet(template);
  return [
    { night1: stationBefore, night2: station },
    {
      night1: stationBefore === undefined ? undefined : { ...stationBefore, ...docked },
      night2: { ...station, ...docked },
    },
    {
      night1: moved(
        { ...(host.night1 ?? host.night2), ...tender },
        (host.night1 ?? host.night2).epochMs,
        tenderErrors,
        random,
      ),
      night2: moved({ ...host.night2, ...tender }, host.night2.epochMs, tenderErrors, random),
    },
    lostFor43Days(template),
    { night1: dayBefore(falling, random), night2: falling },
  ];
}

function lostFor43Days(template: ElementSet): Nights {
  const lost = roundToTwoLine({
    ...template,
    designator: '309021',
    name: '',
    internationalDesignator: '1999-940FR',
    epochMs: Date.UTC(2026, 9, 19, 8, 11, 5),
    meanMotionRevPerDay: 14.9,
    eccentricity: 0.0031,
    inclinationDeg: 74.03,
    bstar: 0.0004,
  });
  return { night1: lost, night2: lost };
}

/** Drag grows until SGP4 gives the object up on the second day of the window. */
function fallingSet(template: ElementSet): ElementSet {
  for (let bstar = 0.0004; ; bstar *= 1.05) {
    const set = roundToTwoLine({
      ...template,
      designator: '97061',
      name: 'DUNMARROW 6 R/B',
      internationalDesignator: '2026-926B',
      epochMs: NIGHT_2_MS - 9 * MS_PER_HOUR,
      meanMotionRevPerDay: 16.23,
      eccentricity: 0.0011,
      inclinationDeg: 53.1,
      bstar,
    });
    if (stateAt(set, NIGHT_2_MS + 1.7 * MS_PER_DAY) === undefined) return set;
  }
}

/** Older sets that the file of the second night still holds beside the newer ones. */
function supersededSets(background: readonly Nights[]): ElementSet[] {
  return [12, 340, 777, 1203, 2001].flatMap((from) => {
    const index = background.findIndex(
      ({ night1, night2 }, k) => k >= from && night1 !== undefined && night1.epochMs < night2.epochMs,
    );
    return background[index]?.night1 ?? [];
  });
}

/** The batch as it leaves the upper stage: one plane, speeds that differ by centimeters a second. */
function releasedBatch(): ElementSet[] {
  const random = seededRandom(109);
  const [stage] = walkerShell({
    count: 1,
    planes: 1,
    altitudeKm: 330,
    inclinationDeg: 53.4,
    epochMs: RELEASE_MS,
    firstRightAscensionDeg: 203.5,
    firstMeanAnomalyDeg: 311,
    bstar: 0.00025,
  });
  const state = stateAt(stage, RELEASE_MS);
  if (state === undefined) throw new Error('the upper stage fails');
  const frame = rtnFrame(state.positionKm, state.velocityKmPerS);
  const plus = (a: Vector3, b: Vector3): Vector3 => [a[0] + b[0], a[1] + b[1], a[2] + b[2]];
  return Array.from({ length: BATCH_COUNT }, (_, index) => {
    const place = index - (BATCH_COUNT - 1) / 2;
    const offsetKm: Vector3 = [random.normal(0, 0.002), 0.04 * place, random.normal(0, 0.002)];
    const pushKmPerS: Vector3 = [
      random.normal(0, 0.00001),
      0.00002 * place + random.normal(0, 0.000002),
      random.normal(0, 0.00002),
    ];
    const released = {
      positionKm: plus(state.positionKm, rotateBack(frame, offsetKm)),
      velocityKmPerS: plus(state.velocityKmPerS, rotateBack(frame, pushKmPerS)),
    };
    const set = setThrough(released, RELEASE_MS, {
      ...stage,
      designator: '',
      name: `QUILLMERE C ${String(index + 1).padStart(2, '0')}`,
      internationalDesignator: '',
    });
    return roundToTwoLine(set);
  });
}

type Raised = { readonly set: ElementSet; readonly leavesMs: number; readonly arrivesMs: number };

/** The same satellites a few days later, evenly around their plane at the height of shell A. */
function raisedBatch(batch: readonly ElementSet[]): Raised[] {
  const climbMs = 30 * MS_PER_HOUR;
  const firstLeavesMs = Date.UTC(2026, 11, 8);
  const ring = walkerShell({
    count: BATCH_COUNT,
    planes: 1,
    altitudeKm: 556,
    inclinationDeg: 53.4,
    epochMs: firstLeavesMs + climbMs,
    bstar: 0.00018,
  });
  return batch.map((released, index) => {
    const leavesMs = firstLeavesMs + index * 20 * 60_000;
    const arrivesMs = leavesMs + climbMs;
    const beforeClimb = atEpoch(released, leavesMs);
    const inRing = atEpoch(ring[index], arrivesMs);
    if (beforeClimb === undefined || inRing === undefined) throw new Error(`${released.name} fails`);
    // On the way up the node turns at the mean of the rates below and above.
    const turnedDeg = [atEpoch(released, arrivesMs), atEpoch(ring[index], ring[index].epochMs + climbMs)]
      .map((set, k) => (set?.rightAscensionDeg ?? 0) - [beforeClimb, ring[index]][k].rightAscensionDeg)
      .reduce((sum, degrees) => sum + (((degrees % 360) + 540) % 360) - 180, 0);
    return {
      leavesMs,
      arrivesMs,
      set: roundToTwoLine({
        ...inRing,
        designator: '',
        name: released.name,
        internationalDesignator: '',
        rightAscensionDeg: beforeClimb.rightAscensionDeg + turnedDeg / 2,
      }),
    };
  });
}

function validityCsv(raised: readonly Raised[]): string {
  const rows = raised.flatMap(({ set, leavesMs, arrivesMs }) => [
    [set.name, 'batch.tle', formatUtc(RELEASE_MS), formatUtc(leavesMs)],
    [set.name, 'batch-operating.tle', formatUtc(arrivesMs), ''],
  ]);
  return csv([['name', 'file', 'valid_from', 'valid_until'], ...rows]);
}

function objectsCsv(fleet: readonly ElementSet[], catalog: readonly ElementSet[]): string {
  const own = new Set(fleet.map((set) => set.designator));
  const others = catalog.filter((set) => set.name !== '' && !own.has(set.designator));
  const rows = [
    ...fleet.map((set, index) => [set.designator, set.name, index < 24 ? '1.8' : '2.5', 'YES']),
    ...others.flatMap((set) => {
      if (set.name === 'HOLLOWBRAE STATION') return [[set.designator, set.name, '38', 'YES']];
      if (set.name === 'HOLLOWBRAE FERRY 2') return [[set.designator, set.name, '5', 'N/A']];
      if (set.name === 'QUILLMERE TENDER 1') return [[set.designator, set.name, '1.2', 'YES']];
      if (Number(set.designator) < 97_000) return [];
      if (set.name.endsWith('R/B')) return [[set.designator, set.name, '4.5', 'NO']];
      if (set.name.endsWith('DEB') || set.name.endsWith('COVER'))
        return [[set.designator, set.name, '0.3', 'NO']];
      return [[set.designator, set.name, '2', 'N/A']];
    }),
  ];
  return csv([['designator', 'name', 'hard_body_radius_m', 'maneuverable'], ...rows]);
}

/** Names hold no comma and no quote: nothing to escape. */
function csv(rows: readonly (readonly string[])[]): string {
  return rows.map((row) => `${row.join(',')}\n`).join('');
}

/** In the order of their numbers; a name goes above its lines where there is one. */
function elementFile(sets: readonly ElementSet[]): string {
  const order = [...sets].sort(
    (a, b) => Number(a.designator) - Number(b.designator) || a.epochMs - b.epochMs,
  );
  return order.map((set) => `${(set.name === '' ? toTwoLine(set) : toThreeLine(set)).join('\n')}\n`).join('');
}

/** What goes wrong in real files, one of each. */
function damagedLines(nightMs: number): string {
  const sets = syntheticCatalog({
    seed: 110,
    count: 6,
    epochMs: nightMs,
    mix: { low: 1, eccentric: 0, medium: 0, geosynchronous: 0, decaying: 0, train: 0 },
    firstDesignator: 309_031,
  });
  const [wrongSum, wrongNumber, outOfRange, cut, orphan, underground] = sets.map(toTwoLine);
  const resummed = (line: string) => line.slice(0, 68) + checksum(line);
  const lines = [
    wrongSum[0].slice(0, 68) + String((Number(wrongSum[0][68]) + 3) % 10),
    wrongSum[1],
    wrongNumber[0],
    resummed(`3${wrongNumber[1].slice(1)}`),
    outOfRange[0],
    resummed(`${outOfRange[1].slice(0, 8)}198.1234${outOfRange[1].slice(16)}`),
    cut[0],
    cut[1].slice(0, 47),
    underground[0],
    resummed(`${underground[1].slice(0, 52)}17.62000000${underground[1].slice(63)}`),
    orphan[0],
  ];
  return `${lines.join('\n')}\n`;
}

/** The set that was current a day before this one; the same where this one is old already. */
function dayBefore(set: ElementSet, random: Random): ElementSet | undefined {
  const ageDays = (NIGHT_2_MS - set.epochMs) / MS_PER_DAY;
  const stepDays = random.between(0.4, 1.3);
  const epochMs = Math.min(
    set.epochMs - stepDays * MS_PER_DAY,
    NIGHT_1_MS - random.between(0.02, 0.5) * MS_PER_DAY,
  );
  if (ageDays >= 1) return set;
  if (perigeeHeightKm(set) > 260) return moved(set, epochMs, PUBLIC_ERRORS, random);
  // Deep in the air mean elements cannot be carried over a day: they are fitted to where the object is.
  const state = stateAt(set, set.epochMs);
  if (state === undefined) throw new Error(`${set.designator} fails at its epoch`);
  try {
    return roundToTwoLine(setThrough(state, set.epochMs, { ...set, epochMs }));
  } catch {
    return undefined;
  }
}

function moved(set: ElementSet, epochMs: number, errors: ErrorLaw, random: Random): ElementSet {
  const at = atEpoch(set, epochMs);
  if (at === undefined) throw new Error(`${set.designator} fails at ${formatUtc(epochMs)}`);
  return roundToTwoLine(withErrors(at, errors, random));
}

function sameElements(a: ElementSet, b: ElementSet): boolean {
  return (
    a.epochMs === b.epochMs &&
    a.meanAnomalyDeg === b.meanAnomalyDeg &&
    a.rightAscensionDeg === b.rightAscensionDeg
  );
}

const FAMILIES = [
  'ASHGROVER',
  'BRINDLECOMBE',
  'CINDERLOW',
  'DUNMARROW',
  'ELMSWORTHY',
  'FENWATER',
  'GRISTLEDOWN',
  'LARKENHURST',
  'MERIDOC',
  'MOTTLEBY',
  'OSTREVANE',
  'PELLOWMERE',
  'ROWANTHWAITE',
  'SALTERNESS',
  'STANNERTON',
  'TARNWICK',
  'THORNIVER',
  'VELLUMER',
  'WICKENDALE',
  'YARROWSTED',
];

function inventedName(random: Random): string {
  const kind = random.weighted([
    { suffix: '', weight: 5 },
    { suffix: ' DEB', weight: 4 },
    { suffix: ' R/B', weight: 2 },
  ]);
  return `${random.choice(FAMILIES)} ${1 + random.integer(60)}${kind.suffix}`;
}

if (process.argv[1] === fileURLToPath(import.meta.url)) {
  writeSampleCatalogs(dirname(fileURLToPath(import.meta.url)));
}
