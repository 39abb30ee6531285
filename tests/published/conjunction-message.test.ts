import { readFileSync } from 'node:fs';
import { describe, expect, test } from 'vitest';
import { rtnFrame } from '../../src/ephemeris/rtn-frame.js';
import { formatConjunctionMessage } from '../../src/tables/conjunction-message.js';
import { readConjunctionMessage } from '../../src/tables/read-conjunction-message.js';
import { norm, rotate, scale, subtract } from '../../src/vector.js';
import { exampleConjunction, MESSAGE_RUN } from '../tables/example-conjunction.js';

/** The worked example of CCSDS 508.0-B-1, 3.6.2, figures and names as published there. */
const FILE = 'ccsds-508.0-B-1-example.kvn';
const EXAMPLE = readFileSync(new URL(FILE, import.meta.url), 'utf8');

describe('the worked example of CCSDS 508.0-B-1', () => {
  const message = readConjunctionMessage(EXAMPLE, FILE);

  test('is read as printed', () => {
    expect(message).toMatchObject({
      creationMs: Date.UTC(2010, 2, 12, 22, 31, 12),
      originator: 'JSPOC',
      messageId: '201113719185',
      tcaMs: Date.UTC(2010, 2, 13, 22, 37, 52, 618),
      missDistanceM: 715,
      relativeSpeedMPerS: undefined,
      relativePositionRtnM: undefined,
      relativeVelocityRtnMPerS: undefined,
      collisionProbability: undefined,
      collisionProbabilityMethod: undefined,
      comments: [],
      object1: {
        designator: '12345',
        catalogName: 'SATCAT',
        name: 'SATELLITE A',
        internationalDesignator: '1997-030E',
        ephemerisName: 'EPHEMERIS SATELLITE A',
        covarianceMethod: 'CALCULATED',
        maneuverable: 'YES',
        frame: 'EME2000',
        state: {
          positionKm: [2570.097065, 2244.654904, 6281.497978],
          velocityKmPerS: [4.418769571, 4.833547743, -3.526774282],
        },
        positionCovarianceRtnM2: [
          [41.42, -8.579, -23.13],
          [-8.579, 2533, 13.36],
          [-23.13, 13.36, 70.98],
        ],
      },
      object2: {
        designator: '30337',
        name: 'FENGYUN 1C DEB',
        internationalDesignator: '1999-025AA',
        ephemerisName: 'NONE',
        maneuverable: 'NO',
        positionCovarianceRtnM2: [
          [1337, -48_060, -32.98],
          [-48_060, 2_492_000, -758.88],
          [-32.98, -758.88, 71.05],
        ],
      },
    });
    expect(message.object1.covarianceRtn[3]).toEqual([
      2.52e-3, -5.476, 8.626e-4, 5.744e-3, -1.502e-5, -3.004e-6,
    ]);
    expect(message.object2.covarianceRtn[5]).toEqual([
      4.4e-3, 8.482e-3, 8.633e-5, -1.903e-6, -4.594e-6, 5.178e-5,
    ]);
  });

  // 715.748 m, 14762.085 m/s, 27.364 m and -7.195 m/s follow from the states; 3.6.3 prints 715, 14762, 27.4, -7.2.
  test('has the geometry that its relative figures tell', () => {
    const { state: one } = message.object1;
    const { state: two } = message.object2;
    const frame = rtnFrame(one.positionKm, one.velocityKmPerS);
    const positionM = rotate(frame, scale(subtract(two.positionKm, one.positionKm), 1000));
    const velocityMPerS = rotate(frame, scale(subtract(two.velocityKmPerS, one.velocityKmPerS), 1000));
    expect(norm(positionM)).toBeCloseTo(715.748, 3);
    expect(norm(velocityMPerS)).toBeCloseTo(14_762.085, 3);
    expect(positionM[0]).toBeCloseTo(27.364, 3);
    expect(velocityMPerS[0]).toBeCloseTo(-7.195, 3);
  });
});

/** CCSDS 508.0-B-1, tables 3-1 to 3-4: the keywords that a message may hold, obligatory ones with `!`. */
const STANDARD = `
  CCSDS_CDM_VERS! CREATION_DATE! ORIGINATOR! MESSAGE_FOR MESSAGE_ID! TCA! MISS_DISTANCE! RELATIVE_SPEED
  RELATIVE_POSITION_R RELATIVE_POSITION_T RELATIVE_POSITION_N
  RELATIVE_VELOCITY_R RELATIVE_VELOCITY_T RELATIVE_VELOCITY_N
  START_SCREEN_PERIOD STOP_SCREEN_PERIOD SCREEN_VOLUME_FRAME SCREEN_VOLUME_SHAPE
  SCREEN_VOLUME_X SCREEN_VOLUME_Y SCREEN_VOLUME_Z SCREEN_ENTRY_TIME SCREEN_EXIT_TIME
  COLLISION_PROBABILITY COLLISION_PROBABILITY_METHOD`;
const STANDARD_OBJECT = `
  OBJECT! OBJECT_DESIGNATOR! CATALOG_NAME! OBJECT_NAME! INTERNATIONAL_DESIGNATOR! OBJECT_TYPE
  OPERATOR_CONTACT_POSITION OPERATOR_ORGANIZATION OPERATOR_PHONE OPERATOR_EMAIL EPHEMERIS_NAME!
  COVARIANCE_METHOD! MANEUVERABLE! ORBIT_CENTER REF_FRAME! GRAVITY_MODEL ATMOSPHERIC_MODEL
  N_BODY_PERTURBATIONS SOLAR_RAD_PRESSURE EARTH_TIDES INTRACK_THRUST TIME_LASTOB_START TIME_LASTOB_END
  RECOMMENDED_OD_SPAN ACTUAL_OD_SPAN OBS_AVAILABLE OBS_USED TRACKS_AVAILABLE TRACKS_USED
  RESIDUALS_ACCEPTED WEIGHTED_RMS AREA_PC AREA_DRG AREA_SRP MASS CD_AREA_OVER_MASS CR_AREA_OVER_MASS
  THRUST_ACCELERATION SEDR X! Y! Z! X_DOT! Y_DOT! Z_DOT!
  CR_R! CT_R! CT_T! CN_R! CN_T! CN_N! CRDOT_R! CRDOT_T! CRDOT_N! CRDOT_RDOT!
  CTDOT_R! CTDOT_T! CTDOT_N! CTDOT_RDOT! CTDOT_TDOT!
  CNDOT_R! CNDOT_T! CNDOT_N! CNDOT_RDOT! CNDOT_TDOT! CNDOT_NDOT!`;
const words = (list: string) => list.trim().split(/\s+/);

test('a written message has the keywords of CCSDS 508.0-B-1 in its order, the obligatory ones all', () => {
  const written = formatConjunctionMessage(exampleConjunction(), MESSAGE_RUN)
    .split('\n')
    .filter((line) => line !== '' && !line.startsWith('COMMENT'))
    .map((line) => line.split('=')[0].trim());
  const expected = words(STANDARD + STANDARD_OBJECT + STANDARD_OBJECT);
  let from = 0;
  for (const name of written) {
    const found = expected.findIndex((each, i) => i >= from && each.replace('!', '') === name);
    expect(found, `${name} after ${expected[from - 1]}`).toBeGreaterThanOrEqual(from);
    for (const skipped of expected.slice(from, found)) expect(skipped).not.toMatch('!');
    from = found + 1;
  }
  expect(from).toBe(expected.length);
});

/** Units of the example, each keyword once. */
test('a written message has the units of the example', () => {
  const unitsOf = (text: string) =>
    new Map(
      text
        .split('\n')
        .map((line) => /^(\w+) *= .*?(?: (\[.*\]))?$/.exec(line))
        .filter((match) => match !== null)
        .map(([, name, unit]) => [name, unit]),
    );
  const written = unitsOf(formatConjunctionMessage(exampleConjunction(), MESSAGE_RUN));
  for (const [name, unit] of unitsOf(EXAMPLE)) expect(written.get(name), name).toBe(unit);
});
