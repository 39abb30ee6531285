import { CAUTION } from '../caution.js';
import type { FileCount } from '../elements/element-set.js';
import { formatUtc } from '../elements/utc.js';
import type { Conjunction, ConjunctionObject } from './conjunction.js';
import { exponentText } from './csv-text.js';
import { padOrCut, terminalText, wrapWords } from './terminal-text.js';

/*
 * What the engineer on shift reads first: when, who, how close, how likely, why to distrust it. Two lines
 * for each encounter, figures right-aligned to be compared down the column, no colors: a color would be a
 * verdict. The same text goes to a terminal, a file and a mail.
 */

const COLUMNS = 100;
const GAP = '  ';
const TIME_COLUMNS = 'yyyy-mm-dd hh:mm:ss'.length;
/** Widths of the four figures: miss distance, its radial part, relative speed, probability. */
const FIGURE_COLUMNS = [9, 9, 9, 11] as const;
const FIGURE_HEADS = ['Miss m', 'Radial m', 'Speed m/s', 'Probability'];
const DETAIL_COLUMNS = FIGURE_COLUMNS.reduce((sum, width) => sum + width + GAP.length, -GAP.length);
const NEAREST_WITHOUT_PROBABILITY = 3;
/** Down to here the method is checked; below, a figure would say more than anyone knows. */
const LEAST_SHOWN = 1e-30;

/** Age of one object's elements. */
type ElementAge = { readonly designator: string; readonly ageDays: number };

/** All conjunctions in their ranked order; rows are made only where they are shown. */
export type RankedConjunctions = {
  readonly count: number;
  readonly at: (index: number) => Conjunction;
};

/**
 * The first `limit` conjunctions as a table of 100 columns, then the nearest of those that have no
 * probability and so stand at the end of the ranking; with a `limit` of 0 only how many there are. Ends with
 * a line break.
 */
export function formatConjunctionTable(ranked: RankedConjunctions, limit: number): string {
  const { count, at } = ranked;
  if (count === 0) return 'No conjunctions in the window.\n';
  if (limit === 0) return `${counted(count, 'conjunction')}, none of them shown here.\n`;
  const shown = Math.min(limit, count);
  let firstWithout = count;
  while (firstWithout > 0 && !hasProbability(at(firstWithout - 1))) firstWithout--;
  const without = count - firstWithout;
  const firstNearest = Math.max(firstWithout, shown);
  const nearest = rowsFrom(ranked, firstNearest, firstNearest + NEAREST_WITHOUT_PROBABILITY);

  const rankColumns = Math.max(4, String(firstNearest + nearest.length).length);
  const row = (conjunction: Conjunction, index: number) => tableRow(conjunction, index + 1, rankColumns);
  const lines = [
    shown < count
      ? `The first ${shown} of ${count} conjunctions, by collision probability:`
      : `${counted(count, 'conjunction')}, by collision probability:`,
    '',
    tableHead(rankColumns),
    ...rowsFrom(ranked, 0, shown).flatMap(row),
  ];
  if (nearest.length > 0)
    lines.push(
      '',
      `${counted(without, 'conjunction')} without a probability at the end of the ranking, nearest first:`,
      ...nearest.flatMap((conjunction, i) => row(conjunction, firstNearest + i)),
    );
  lines.push(
    '',
    'Radial: of object 2 minus object 1, along the position of object 1. At most: the highest',
    'probability that any common scaling of the sigmas gives. Ages: of the elements of objects 1 and 2',
    'at closest approach.',
  );
  return `${lines.join('\n')}\n`;
}

/**
 * One line a file, and the total of several: how many sets were read and what became of each. Ends with a
 * line break.
 */
export function formatFileCounts(counts: readonly FileCount[]): string {
  const total = { file: 'in all', read: 0, used: 0, superseded: 0, rejected: 0 };
  for (const count of counts) {
    total.read += count.read;
    total.used += count.used;
    total.superseded += count.superseded;
    total.rejected += count.rejected;
  }
  const width = String(total.read).length;
  const figure = (value: number) => String(value).padStart(width);
  const line = (count: Omit<FileCount, 'sha256'>) =>
    `  ${figure(count.read)} read = ${figure(count.used)} used + ${figure(count.superseded)} superseded + ` +
    `${figure(count.rejected)} rejected  ${terminalText(count.file === '-' ? 'standard input' : count.file)}`;
  return `${['Element sets:', ...counts.map(line), ...(counts.length > 1 ? [line(total)] : [])].join('\n')}\n`;
}

/**
 * One line on how old the elements of a group are: youngest, median, oldest and whose it is. Ends with a
 * line break.
 *
 * @param group how the line starts, such as `Fleet`
 * @param ages at the start of the window; negative where the epoch lies after it
 */
export function formatElementAges(group: string, ages: readonly ElementAge[]): string {
  if (ages.length === 0) return `${group}: no element sets\n`;
  const sorted = ages.toSorted((a, b) => a.ageDays - b.ageDays);
  const middle = (sorted.length - 1) / 2;
  const median = (sorted[Math.floor(middle)].ageDays + sorted[Math.ceil(middle)].ageDays) / 2;
  const oldest = sorted[sorted.length - 1];
  return (
    `${group}: ${counted(ages.length, 'element set')}, age at the start of the window ` +
    `${days(sorted[0].ageDays)} to ${days(oldest.ageDays)} d, median ${days(median)} d; ` +
    `oldest ${terminalText(oldest.designator)}\n`
  );
}

/** The caution on a line of its own, unbroken so that a search finds it. Ends with a line break. */
export function formatCaution(): string {
  return `${CAUTION}\n`;
}

function rowsFrom({ count, at }: RankedConjunctions, from: number, to: number): Conjunction[] {
  return Array.from({ length: Math.max(0, Math.min(to, count) - from) }, (_, i) => at(from + i));
}

function tableHead(rankColumns: number): string {
  return [
    'Rank'.padStart(rankColumns),
    'TCA (UTC)'.padEnd(TIME_COLUMNS),
    'Objects'.padEnd(objectColumns(rankColumns)),
    ...FIGURE_HEADS.map((head, i) => head.padStart(FIGURE_COLUMNS[i])),
  ].join(GAP);
}

function tableRow(conjunction: Conjunction, rank: number, rankColumns: number): string[] {
  const figures = [
    conjunction.missDistanceM.toFixed(1),
    withoutNegativeZero(conjunction.relativePositionRtnM[0].toFixed(1)),
    conjunction.relativeSpeedMPerS.toFixed(1),
    probability(conjunction.collisionProbability),
  ];
  const first = [
    String(rank).padStart(rankColumns),
    formatUtc(Math.round(conjunction.tcaMs / 1000) * 1000)
      .replace('T', ' ')
      .slice(0, TIME_COLUMNS),
    object(conjunction.object1, rankColumns),
    ...figures.map((figure, i) => figure.padStart(FIGURE_COLUMNS[i])),
  ].join(GAP);
  const doubts = [
    ...(conjunction.collisionProbabilityMax === undefined
      ? []
      : [`at most ${probability(conjunction.collisionProbabilityMax)}`]),
    `ages ${days(conjunction.object1.elementAgeDays)}, ${days(conjunction.object2.elementAgeDays)} d`,
    ...(conjunction.remarks.length === 0 ? [] : [conjunction.remarks.join(' ')]),
  ].join('; ');
  const margin = ' '.repeat(rankColumns + GAP.length + TIME_COLUMNS + GAP.length);
  const [detail, ...more] = wrapWords(doubts, DETAIL_COLUMNS);
  const blank = ' '.repeat(objectColumns(rankColumns));
  return [
    first,
    `${margin}${object(conjunction.object2, rankColumns)}${GAP}${detail}`,
    ...more.map((line) => `${margin}${blank}${GAP}${line}`),
  ];
}

/** Whether there is a figure; not so for a singular covariance. */
function hasProbability({ collisionProbability }: Conjunction): boolean {
  return collisionProbability !== undefined && !Number.isNaN(collisionProbability);
}

function objectColumns(rankColumns: number): number {
  return COLUMNS - rankColumns - TIME_COLUMNS - DETAIL_COLUMNS - 3 * GAP.length;
}

function object(side: ConjunctionObject, rankColumns: number): string {
  return padOrCut(terminalText(`${side.designator} ${side.name}`), objectColumns(rankColumns));
}

function probability(value: number | undefined): string {
  if (value === undefined || Number.isNaN(value)) return 'none';
  return value < LEAST_SHOWN ? `< ${exponentText(LEAST_SHOWN, 0)}` : exponentText(value, 1);
}

function days(value: number): string {
  return withoutNegativeZero(value.toFixed(1));
}

function withoutNegativeZero(text: string): string {
  return text === '-0.0' ? '0.0' : text;
}

function counted(count: number, what: string): string {
  return `${count} ${what}${count === 1 ? '' : 's'}`;
}
