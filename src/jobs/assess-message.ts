import { readFile } from 'node:fs/promises';
import { CAUTION } from '../caution.js';
import { formatUtc } from '../elements/utc.js';
import { moveOnTwoBody } from '../ephemeris/two-body.js';
import { InputError } from '../input-error.js';
import { assessEncounter } from '../probability/assess-encounter.js';
import { curvedPathProbability } from '../probability/curved-path.js';
import type { PathEncounter } from '../probability/encounter-path.js';
import { monteCarlo } from '../probability/monte-carlo.js';
import { exponentText } from '../tables/csv-text.js';
import {
  type ConjunctionMessage,
  type ConjunctionMessageObject,
  readConjunctionMessage,
} from '../tables/read-conjunction-message.js';
import { terminalText } from '../tables/terminal-text.js';
import { fileError } from './file-errors.js';

const LABEL_COLUMNS = 34;
const VALUE_COLUMNS = 22;
/** The path is followed this long before and after closest approach, at most a quarter of a low orbit. */
const PATH_MS = 1_200_000;

/**
 * Sets what a conjunction message says beside what its own states and covariances give.
 *
 * @param file message in KVN (CCSDS 508.0-B-1)
 * @param samples of the Monte Carlo run, `undefined` for none
 * @returns lines for standard output
 * @throws InputError where the file is no such message, or its figures allow no assessment
 */
export async function assessMessage(
  file: string,
  hardBodyRadiusM: number,
  samples: number | undefined,
  seed: number,
): Promise<string[]> {
  const text = await readFile(file, 'utf8').catch((error: unknown) => {
    throw fileError(file, error);
  });
  const message = readConjunctionMessage(text, file);
  const assessed = refused(file, () =>
    assessEncounter({ object1: given(message.object1), object2: given(message.object2), hardBodyRadiusM }),
  );
  const path = pathOf(message, hardBodyRadiusM);
  const curved = refused(file, () => curvedPathProbability(path));
  const [r, t, n] = assessed.relativePositionRtnM;
  const [vr, vt, vn] = assessed.relativeVelocityRtnMPerS;
  const { relativePositionRtnM: said, relativeVelocityRtnMPerS: saidVelocity } = message;
  const lines = [
    `Conjunction message ${terminalText(message.messageId)} of ${terminalText(message.originator)}`,
    `TCA ${formatUtc(message.tcaMs)}`,
    `Object 1: ${nameOf(message.object1)}`,
    `Object 2: ${nameOf(message.object2)}`,
    '',
    row('', 'the message says', 'its states give'),
    row('Miss distance, m', meters(message.missDistanceM), meters(assessed.missDistanceM)),
    row('Relative speed, m/s', meters(message.relativeSpeedMPerS), meters(assessed.relativeSpeedMPerS)),
    row('Relative position R, m', meters(said?.[0]), meters(r)),
    row('Relative position T, m', meters(said?.[1]), meters(t)),
    row('Relative position N, m', meters(said?.[2]), meters(n)),
    row('Relative velocity R, m/s', meters(saidVelocity?.[0]), meters(vr)),
    row('Relative velocity T, m/s', meters(saidVelocity?.[1]), meters(vt)),
    row('Relative velocity N, m/s', meters(saidVelocity?.[2]), meters(vn)),
    row(
      'Collision probability',
      probability(message.collisionProbability),
      probability(assessed.collisionProbability),
    ),
    row('  by', message.collisionProbabilityMethod ?? '-', 'FOSTER-1992'),
    row('  along the curved path', '-', probability(curved?.probability)),
    row('  highest over all sigma scales', '-', probability(assessed.collisionProbabilityMax)),
    row('Mahalanobis distance', '-', meters(assessed.mahalanobisDistance)),
    '',
    `Hard-body radius ${hardBodyRadiusM} m, both objects together: given here, a message does not say it.`,
  ];
  if (samples !== undefined) {
    const tried = refused(file, () => monteCarlo(path, samples, seed));
    lines.push(
      `Monte Carlo: ${tried.hits} of ${tried.samples} samples came within the radius (seed ${seed}): probability ${exponentText(tried.probability, 3)}, 99 % confidence ${exponentText(tried.low, 3)} to ${exponentText(tried.high, 3)}`,
    );
  }
  lines.push(
    'Curved path and Monte Carlo: two-body motion from the states, errors constant in the RTN of each object.',
    CAUTION,
  );
  return lines;
}

function given({ state, positionCovarianceRtnM2 }: ConjunctionMessageObject) {
  return { ...state, covarianceRtnM2: positionCovarianceRtnM2 };
}

function pathOf(message: ConjunctionMessage, hardBodyRadiusM: number): PathEncounter {
  const { object1, object2, tcaMs } = message;
  return {
    statesAt: (timeMs) => ({
      object1: moveOnTwoBody(object1.state, (timeMs - tcaMs) / 1000),
      object2: moveOnTwoBody(object2.state, (timeMs - tcaMs) / 1000),
    }),
    fromMs: tcaMs - PATH_MS,
    tcaMs,
    toMs: tcaMs + PATH_MS,
    covariance1RtnM2: object1.positionCovarianceRtnM2,
    covariance2RtnM2: object2.positionCovarianceRtnM2,
    hardBodyRadiusM,
  };
}

/** A message whose figures cannot be assessed is a mistake of the input, not of the program. */
function refused<T>(file: string, work: () => T): T {
  try {
    return work();
  } catch (error) {
    if (error instanceof RangeError) throw new InputError(`${file}: ${error.message}`, { cause: error });
    throw error;
  }
}

function nameOf({ designator, name, maneuverable }: ConjunctionMessageObject): string {
  return `${terminalText(designator)} ${terminalText(name)}, maneuverable ${maneuverable}`;
}

function row(label: string, left: string, right: string): string {
  return `${label.padEnd(LABEL_COLUMNS)}${left.padStart(VALUE_COLUMNS)}${right.padStart(VALUE_COLUMNS)}`.trimEnd();
}

function meters(value: number | undefined): string {
  return value === undefined ? '-' : value.toFixed(3);
}

function probability(value: number | undefined): string {
  return value === undefined ? '-' : exponentText(value, 4);
}
