import { formatUtc } from '../elements/utc.js';
import type { CompanionPair } from '../tables/companions-csv.js';
import type { ConjunctionObject } from '../tables/conjunction.js';
import { exponentText } from '../tables/csv-text.js';
import type { RankedConjunctions } from '../tables/terminal-table.js';
import { terminalText } from '../tables/terminal-text.js';
import type { ScreenOptions } from './screen-options.js';

const COMPANIONS_SHOWN = 3;

/**
 * Why the command ends with status 3, for whoever is woken by that; nothing where no conjunction reaches
 * the probability.
 *
 * @param alertPc `undefined` where no alert was asked for
 */
export function alertLines({ count, at }: RankedConjunctions, alertPc: number | undefined): string[] {
  if (alertPc === undefined) return [];
  let reaching = 0;
  while (reaching < count && (at(reaching).collisionProbability ?? -1) >= alertPc) reaching++;
  if (reaching === 0) return [];
  const { object1, object2, tcaMs, collisionProbability } = at(0);
  const side = ({ designator, name }: ConjunctionObject) => terminalText(`${designator} ${name}`.trimEnd());
  const tca = formatUtc(Math.round(tcaMs / 1000) * 1000).replace('.000Z', 'Z');
  return [
    `Alert: ${reaching === 1 ? '1 conjunction reaches' : `${reaching} conjunctions reach`} the probability ${alertPc} of --alert-pc,`,
    `the highest with ${exponentText(collisionProbability as number, 1)}: ${side(object1)} / ${side(object2)}, TCA ${tca}`,
    '',
  ];
}

/** The end of a run in one line of the log, where a collector sees nothing else of it. */
export function finishedText(
  outPath: string,
  { count, at }: RankedConjunctions,
  alertReached: boolean,
): string {
  const highest = count === 0 ? undefined : at(0).collisionProbability;
  const probability =
    highest === undefined
      ? ''
      : `, highest probability ${exponentText(highest, 1)}${alertReached ? ', which reaches --alert-pc' : ''}`;
  return `finished: ${count} conjunction${count === 1 ? '' : 's'}${probability}; results in ${outPath}`;
}

/** What was screened against what, when and how near, for whoever sees nothing else of the run. */
export function screenedLine(
  options: Pick<ScreenOptions, 'allOnAll' | 'withinFleet' | 'startMs' | 'volume' | 'sigmaPath'>,
  endMs: number,
  primaryCount: number,
  otherCount: number,
): string {
  const { volume } = options;
  const objects = (count: number) => `${count} object${count === 1 ? '' : 's'}`;
  const what = options.allOnAll
    ? `${objects(primaryCount)} on each other`
    : `${objects(primaryCount)} of the fleet on ${objects(otherCount)}${options.withinFleet ? ' and on each other' : ''}`;
  const near =
    volume.shape === 'SPHERE'
      ? `within ${volume.missKm} km`
      : `in a ${volume.shape} of ${volume.halfSizeRtnKm.join(', ')} km (half-sizes in RTN)`;
  const minute = (ms: number) => formatUtc(ms).slice(0, 16).replace('T', ' ');
  return `Screened: ${what}, ${minute(options.startMs)} to ${minute(endMs)} UTC, ${near}, ${options.sigmaPath === undefined ? 'built-in sigmas' : `sigmas of ${options.sigmaPath}`}.`;
}

/** Pairs that fly together, the closest first, so that none is out of sight because it is no encounter. */
export function companionLines(pairs: readonly CompanionPair[]): string[] {
  if (pairs.length === 0) return [];
  const side = ({ designator, name }: CompanionPair['object1']) =>
    terminalText(`${designator} ${name}`.trimEnd());
  const shown = pairs.toSorted((a, b) => a.closestDistanceM - b.closestDistanceM).slice(0, COMPANIONS_SHOWN);
  const count = pairs.length === 1 ? '1 pair flies' : `${pairs.length} pairs fly`;
  return [
    `${count} together for the whole window: see companions.csv. The closest:`,
    ...shown.map(
      (pair) =>
        `  ${side(pair.object1)} / ${side(pair.object2)}: ${pair.closestDistanceM.toFixed(0)} m at ${formatUtc(pair.closestMs).slice(0, 19).replace('T', ' ')}`,
    ),
    '',
  ];
}

/** Where the results are and what is there, the messages counted instead of named. */
export function resultsLine(outPath: string, files: readonly string[]): string {
  const messages = files.filter((name) => name.startsWith('cdm/')).length;
  const named = files.filter((name) => !name.startsWith('cdm/'));
  const counted =
    messages === 0 ? [] : [`${messages} conjunction message${messages === 1 ? '' : 's'} in cdm/`];
  return `Results in ${outPath}: ${[...named, ...counted].join(', ')}`;
}
