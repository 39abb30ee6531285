import { CAUTION } from '../caution.js';
import { formatUtc } from '../elements/utc.js';
import { EARTH_MU_KM3_PER_S2 } from '../ephemeris/gravity.js';
import type { OrbitState } from '../ephemeris/state.js';
import { temeToEme2000 } from '../ephemeris/teme-to-eme2000.js';
import { cross, norm, type Vector3 } from '../vector.js';
import type { Conjunction, ConjunctionObject } from './conjunction.js';
import { exponentText, fixedCell } from './csv-text.js';
import { CONJUNCTION_MESSAGE_KEYWORDS, COVARIANCE_KEYWORDS, type MessagePart } from './message-keywords.js';
import { wrapWords } from './terminal-text.js';

/** What all messages of a run have in common. */
export type MessageRun = {
  readonly originator: string;
  /** Milliseconds of UTC since 1970-01-01, as the other times here. */
  readonly creationMs: number;
  readonly screenStartMs: number;
  readonly screenStopMs: number;
  /** What counted as close: a sphere, or half-sizes along R, T and N of object 1. */
  readonly volume:
    | { readonly shape: 'SPHERE'; readonly missKm: number }
    | { readonly shape: 'BOX' | 'ELLIPSOID'; readonly halfSizeRtnKm: Vector3 };
};

/** Of the velocity errors with the position errors that cause them; short of -1, that rounding leaves the matrix definite. */
const CORRELATION = -0.99;
const KEYWORD_COLUMNS = 29;
const COMMENT_COLUMNS = 240;
/** A line has 254 characters at most (CCSDS 508.0-B-1, 6.2); keyword and a name of this length stay below. */
const TEXT_COLUMNS = 200;
const UNKNOWN = 'UNKNOWN';

/** `YYYYMMDDThhmmssmmm_DESIGNATOR1_DESIGNATOR2.kvn`: time of closest approach and both objects. */
export function conjunctionMessageFileName(conjunction: Conjunction): string {
  return `${messageStem(conjunction)}.kvn`;
}

/**
 * One conjunction as a conjunction data message (CCSDS 508.0-B-1, KVN, lines ended by a line feed). States
 * are turned from TEME to EME2000; the time of closest approach is rounded to a millisecond, the states are
 * not moved by that.
 *
 * Only letters, digits and signs of ASCII may stand in a message: accents are dropped from names, other
 * characters become `?`, and a comment says so.
 *
 * @throws RangeError naming the keyword where the conjunction holds no finite figure
 */
export function formatConjunctionMessage(conjunction: Conjunction, run: MessageRun): string {
  const lines = [
    ...part('message', messageValues(conjunction, run), {
      CREATION_DATE: [CAUTION],
      TCA: [
        `Hard-body radius, sum of both objects: ${fixed('hard-body radius', conjunction.hardBodyRadiusM, 3)} m`,
        ...probabilityComments(conjunction),
        ...(conjunction.remarks.length === 0 ? [] : [`Remarks: ${conjunction.remarks.join(' ')}`]),
        'SCREEN_VOLUME figures are half-sizes.',
      ],
    }),
    ...objectPart('OBJECT1', conjunction.object1, conjunction.tcaMs),
    ...objectPart('OBJECT2', conjunction.object2, conjunction.tcaMs),
  ];
  return `${lines.join('\n')}\n`;
}

/**
 * The covariance of an object of which only position sigmas are known, lower triangle row by row over R, T,
 * N and their rates, m and s.
 *
 * The velocity terms follow from orbital motion. An object late along its orbit by dt has the position
 * error T = v dt and a radial velocity error that gravity made in dt: R' = -k T. At the energy that the
 * drift along the orbit shows best, an object too high by R is too slow by T' = -k R. An error across the
 * orbit plane swings at the orbital rate with any phase: N' has k times the sigma of N and no correlation.
 * k is gravity over transverse speed, mu / (r h), the mean motion on a circle.
 *
 * @param sigmaRtnM one-sigma in the object's RTN frame
 * @param state inertial state of the object
 */
export function covarianceFromSigmas(sigmaRtnM: Vector3, state: OrbitState): readonly number[] {
  const momentum = norm(cross(state.positionKm, state.velocityKmPerS));
  const rate = EARTH_MU_KM3_PER_S2 / (norm(state.positionKm) * momentum);
  const [r, t, n] = sigmaRtnM.map((sigma) => sigma * sigma);
  const terms: Readonly<Record<string, number>> = {
    CR_R: r,
    CT_T: t,
    CN_N: n,
    CRDOT_T: CORRELATION * rate * t,
    CRDOT_RDOT: rate * rate * t,
    CTDOT_R: CORRELATION * rate * r,
    CTDOT_TDOT: rate * rate * r,
    CNDOT_NDOT: rate * rate * n,
  };
  return COVARIANCE_KEYWORDS.map(({ name }) => terms[name] ?? 0);
}

type Values = Readonly<Record<string, string | undefined>>;

function messageValues(conjunction: Conjunction, run: MessageRun): Values {
  const position = conjunction.relativePositionRtnM;
  const velocity = conjunction.relativeVelocityRtnMPerS;
  const halfSizeKm =
    run.volume.shape === 'SPHERE'
      ? ([run.volume.missKm, run.volume.missKm, run.volume.missKm] as const)
      : run.volume.halfSizeRtnKm;
  return {
    CCSDS_CDM_VERS: '1.0',
    CREATION_DATE: time('CREATION_DATE', run.creationMs),
    ORIGINATOR: messageText(run.originator),
    MESSAGE_ID: `${messageStem(conjunction)}_${compactTime(run.creationMs)}`,
    TCA: time('TCA', conjunction.tcaMs),
    MISS_DISTANCE: fixed('MISS_DISTANCE', conjunction.missDistanceM, 3),
    RELATIVE_SPEED: fixed('RELATIVE_SPEED', conjunction.relativeSpeedMPerS, 4),
    RELATIVE_POSITION_R: fixed('RELATIVE_POSITION_R', position[0], 3),
    RELATIVE_POSITION_T: fixed('RELATIVE_POSITION_T', position[1], 3),
    RELATIVE_POSITION_N: fixed('RELATIVE_POSITION_N', position[2], 3),
    RELATIVE_VELOCITY_R: fixed('RELATIVE_VELOCITY_R', velocity[0], 4),
    RELATIVE_VELOCITY_T: fixed('RELATIVE_VELOCITY_T', velocity[1], 4),
    RELATIVE_VELOCITY_N: fixed('RELATIVE_VELOCITY_N', velocity[2], 4),
    START_SCREEN_PERIOD: time('START_SCREEN_PERIOD', run.screenStartMs),
    STOP_SCREEN_PERIOD: time('STOP_SCREEN_PERIOD', run.screenStopMs),
    SCREEN_VOLUME_FRAME: 'RTN',
    SCREEN_VOLUME_SHAPE: run.volume.shape === 'SPHERE' ? 'ELLIPSOID' : run.volume.shape,
    SCREEN_VOLUME_X: fixed('SCREEN_VOLUME_X', halfSizeKm[0] * 1000, 3),
    SCREEN_VOLUME_Y: fixed('SCREEN_VOLUME_Y', halfSizeKm[1] * 1000, 3),
    SCREEN_VOLUME_Z: fixed('SCREEN_VOLUME_Z', halfSizeKm[2] * 1000, 3),
    SCREEN_ENTRY_TIME: optionalTime('SCREEN_ENTRY_TIME', conjunction.screenEntryMs),
    SCREEN_EXIT_TIME: optionalTime('SCREEN_EXIT_TIME', conjunction.screenExitMs),
    ...(conjunction.collisionProbability === undefined
      ? {}
      : {
          COLLISION_PROBABILITY: exponent('COLLISION_PROBABILITY', conjunction.collisionProbability),
          COLLISION_PROBABILITY_METHOD: messageText(conjunction.collisionProbabilityMethod),
        }),
  };
}

function probabilityComments(conjunction: Conjunction): string[] {
  const comments: string[] = [];
  if (conjunction.collisionProbability === undefined) comments.push('No collision probability can be given.');
  if (conjunction.collisionProbabilityMax !== undefined)
    comments.push(
      'Highest probability that any common scaling of both covariances gives: ' +
        exponent('highest probability', conjunction.collisionProbabilityMax),
    );
  if (conjunction.pairProbability !== undefined)
    comments.push(
      `Probability over all encounters of the pair in the screening period: ${exponent('pair probability', conjunction.pairProbability)}`,
    );
  return comments;
}

function objectPart(which: 'OBJECT1' | 'OBJECT2', object: ConjunctionObject, tcaMs: number): string[] {
  const name = object.name === '' ? UNKNOWN : messageText(object.name);
  const state = temeToEme2000(object.state, tcaMs);
  const covariance = covarianceFromSigmas(object.sigmaRtnM, object.state);
  const [x, y, z] = state.positionKm;
  const [xDot, yDot, zDot] = state.velocityKmPerS;
  const values: Values = {
    OBJECT: which,
    OBJECT_DESIGNATOR: messageText(object.designator),
    CATALOG_NAME: object.isPredicted === true ? 'LAUNCH BATCH' : 'SATCAT',
    OBJECT_NAME: name,
    INTERNATIONAL_DESIGNATOR:
      object.internationalDesignator === '' ? UNKNOWN : messageText(object.internationalDesignator),
    EPHEMERIS_NAME: 'NONE',
    COVARIANCE_METHOD: 'DEFAULT',
    MANEUVERABLE: object.maneuverable,
    ORBIT_CENTER: 'EARTH',
    REF_FRAME: 'EME2000',
    X: fixed('X', x, 6),
    Y: fixed('Y', y, 6),
    Z: fixed('Z', z, 6),
    X_DOT: fixed('X_DOT', xDot, 9),
    Y_DOT: fixed('Y_DOT', yDot, 9),
    Z_DOT: fixed('Z_DOT', zDot, 9),
    ...Object.fromEntries(COVARIANCE_KEYWORDS.map(({ name }, i) => [name, exponent(name, covariance[i])])),
  };
  const epoch = time('epoch', object.elementEpochMs);
  const age = fixed('element age', object.elementAgeDays, 4);
  return part('object', values, {
    OBJECT:
      object.name === '' || object.name === name
        ? []
        : ['OBJECT_NAME is put into the characters of a message; the full name is in conjunctions.csv.'],
    X: [
      object.isPredicted === true
        ? `State: SGP4 on mean elements predicted before launch, of epoch ${epoch}, ${age} d after release at TCA, turned from TEME to EME2000.`
        : `State: SGP4 on public mean elements of epoch ${epoch}, ${age} d old at TCA, turned from TEME to EME2000.`,
      `Position covariance: squares of the one-sigma values that the screening used, R ${sigma(object, 0)} m, T ${sigma(object, 1)} m, ` +
        `N ${sigma(object, 2)} m, not correlated; not the result of an orbit determination.`,
      'Velocity covariance: derived from the position sigmas by orbital motion, with k = mu/(r h): ' +
        `sigma RDOT = k sigma T, sigma TDOT = k sigma R, sigma NDOT = k sigma N; correlation of RDOT with T and of ` +
        `TDOT with R ${CORRELATION}, all others 0.`,
    ],
  });
}

function sigma(object: ConjunctionObject, axis: 0 | 1 | 2): string {
  return fixed('sigma', object.sigmaRtnM[axis], 1);
}

/** The lines of one part in the order of the standard, each comment before the keyword it is filed under. */
function part(
  which: MessagePart,
  values: Values,
  commentsBefore: Readonly<Record<string, readonly string[]>>,
): string[] {
  const lines: string[] = [];
  for (const { name, unit, part: of } of CONJUNCTION_MESSAGE_KEYWORDS) {
    const value = values[name];
    if (of !== which || value === undefined) continue;
    for (const comment of commentsBefore[name] ?? [])
      lines.push(
        ...wrapWords(messageText(comment, Number.POSITIVE_INFINITY), COMMENT_COLUMNS).map(
          (line) => `COMMENT ${line}`,
        ),
      );
    lines.push(`${name.padEnd(KEYWORD_COLUMNS)}= ${value}${unit === '' ? '' : ` [${unit}]`}`);
  }
  return lines;
}

/** Text in the printable ASCII of a message: accents dropped, line breaks and tabs blanks, the rest `?`. */
function messageText(text: string, length = TEXT_COLUMNS): string {
  const ascii = text
    .normalize('NFD')
    .replace(/\p{Mn}/gu, '')
    .replace(/[\r\n\t]+/g, ' ')
    .replace(/[^ -~]/gu, '?')
    .trim()
    .slice(0, length)
    .trimEnd();
  return ascii === '' ? UNKNOWN : ascii;
}

function messageStem(conjunction: Conjunction): string {
  const designators = [conjunction.object1, conjunction.object2].map(({ designator }) =>
    designator.replace(/[^A-Za-z0-9-]/g, '-'),
  );
  return [compactTime(conjunction.tcaMs), ...designators].join('_');
}

/** `YYYYMMDDThhmmssmmm` */
function compactTime(ms: number): string {
  return formatUtc(ms).replace(/[-:.Z]/g, '');
}

function time(what: string, ms: number): string {
  if (!Number.isFinite(ms)) throw new RangeError(`${what} is ${ms}`);
  return formatUtc(ms).slice(0, -1);
}

function optionalTime(what: string, ms: number | undefined): string | undefined {
  return ms === undefined ? undefined : time(what, ms);
}

function fixed(what: string, value: number, decimals: 1 | 3 | 4 | 6 | 9): string {
  if (!Number.isFinite(value)) throw new RangeError(`${what} is ${value}`);
  return fixedCell(value, decimals);
}

function exponent(what: string, value: number): string {
  if (!Number.isFinite(value)) throw new RangeError(`${what} is ${value}`);
  return exponentText(value, 6);
}
