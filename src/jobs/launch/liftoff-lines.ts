import { formatUtc } from '../../elements/utc.js';
import { exponentText } from '../../tables/csv-text.js';
import type { BrokenLimit, LiftoffEncounter, LiftoffRow } from '../../tables/slips-csv.js';
import { padOrCut, terminalText, wrapWords } from '../../tables/terminal-text.js';
import type { LiftoffLimits } from './launch-options.js';

const COLUMNS = 100;
const GAP = '  ';
const SLIP_COLUMNS = 12;
const VERDICT_COLUMNS = 'Clear'.length;
const COUNT_COLUMNS = 'Breach'.length;
const CLOSEST_COLUMNS = 'Closest km'.length;
const PROBABLE_COLUMNS = 'Highest Pc'.length;
const SHORT: Readonly<Record<BrokenLimit, string>> = {
  'any encounter': 'met',
  'too close': 'close',
  'too probable': 'probable',
  'no probability': 'no figure',
  'flying along': 'along',
};
/** A long list is for slips.csv. */
const MOST_STRETCHES = 61;

/**
 * What a launch conductor asks first: which liftoffs are clear of the limits, and which are not, and why.
 * Neighboring candidates of one verdict share a line, with the worst of each figure among them.
 *
 * @param rows in time order, the nominal liftoff among them
 */
export function liftoffLines(rows: readonly LiftoffRow[], limits: LiftoffLimits): string[] {
  const nominal = rows.find(({ slipMs }) => slipMs === 0) as LiftoffRow;
  const rule = `Clear: ${limitsInWords(limits)}.`;
  if (rows.length === 1) {
    const verdict = nominal.isClear ? 'clear' : `NOT CLEAR: ${nominal.whyNot}`;
    return [
      `Liftoff ${shortUtc(nominal.liftoffMs)}: ${verdict}.`,
      ...(nominal.encounters === 0 ? [] : [`${upperFirst(worstOf(nominal))}.`]),
      rule,
    ].flatMap((line) => wrapWords(terminalText(line), COLUMNS));
  }
  const clear = rows.filter(({ isClear }) => isClear).length;
  const [best] = rows.toSorted((a, b) => a.bestRank - b.bestRank);
  const stretches = stretchesOf(rows);
  const days = new Set(
    [rows[0], rows[rows.length - 1]].map(({ liftoffMs }) => shortUtc(liftoffMs).slice(0, 10)),
  );
  const [day] = days;
  const bestText =
    best.encounters === 0
      ? 'no encounter at all'
      : `${counted(best.encounters, 'encounter')}, ${worstOf(best)}`;
  return [
    ...wrapWords(`${clear} of ${rows.length} liftoffs are clear. ${rule}`, COLUMNS),
    '',
    ...table(stretches.slice(0, MOST_STRETCHES), days.size === 1 ? day : undefined),
    ...(stretches.length > MOST_STRETCHES
      ? [`and ${stretches.length - MOST_STRETCHES} more stretches of one verdict: see slips.csv`]
      : []),
    '',
    ...[
      `${best.isClear ? 'Best' : 'None is clear; the least bad'}: ${shortUtc(best.liftoffMs)} (slip ${minutes(best.slipMs)} min), ${bestText}.`,
      `Nominal: ${shortUtc(nominal.liftoffMs)} is ${nominal.isClear ? 'clear' : `NOT CLEAR: ${nominal.whyNot}`}; place ${nominal.bestRank} of ${rows.length}.`,
    ].flatMap((line) => wrapWords(terminalText(line), COLUMNS)),
  ];
}

/** What a liftoff must keep to be called clear. */
function limitsInWords({ clearKm, alertPc }: LiftoffLimits): string {
  if (clearKm === undefined && alertPc === undefined)
    return 'no encounter at all, nothing flying along (neither --clear-km nor --alert-pc is given)';
  return [
    ...(clearKm === undefined ? [] : [`no encounter closer than ${clearKm} km`]),
    ...(alertPc === undefined ? [] : [`none with a probability of ${exponentText(alertPc, 1)} or more`]),
    'nothing flying along',
  ].join(', ');
}

function stretchesOf(rows: readonly LiftoffRow[]): LiftoffRow[][] {
  const stretches: LiftoffRow[][] = [];
  for (const row of rows) {
    const last = stretches.at(-1);
    if (last !== undefined && last[0].isClear === row.isClear) last.push(row);
    else stretches.push([row]);
  }
  return stretches;
}

/** @param day of all rows, where it is one; it then stands in the head alone */
function table(stretches: readonly LiftoffRow[][], day: string | undefined): string[] {
  const timeColumns =
    day === undefined ? 'mm-dd hh:mm:ss to mm-dd hh:mm:ss'.length : 'hh:mm:ss to hh:mm:ss'.length;
  const time = ({ liftoffMs }: LiftoffRow) =>
    shortUtc(liftoffMs)
      .slice(day === undefined ? 5 : 11, -1)
      .replace('T', ' ');
  const columns = (cells: readonly string[], last: string) =>
    `${[
      cells[0].padEnd(SLIP_COLUMNS),
      cells[1].padEnd(timeColumns),
      cells[2].padEnd(VERDICT_COLUMNS),
      cells[3].padStart(COUNT_COLUMNS),
      cells[4].padStart(CLOSEST_COLUMNS),
      cells[5].padStart(PROBABLE_COLUMNS),
    ].join(GAP)}${GAP}${last}`;
  const head = columns(
    ['Slip min', day ?? 'Liftoff', 'Clear', 'Breach', 'Closest km', 'Highest Pc'],
    'Why not: worst object',
  );
  const room = COLUMNS - columns(['', '', '', '', '', ''], '').length;
  return [
    head,
    ...stretches.map((stretch) => {
      const [first] = stretch;
      const last = stretch[stretch.length - 1];
      const isOne = stretch.length === 1;
      const { closest, mostProbable } = worstIn(stretch);
      return columns(
        [
          isOne ? minutes(first.slipMs) : `${minutes(first.slipMs)} to ${minutes(last.slipMs)}`,
          isOne ? time(first) : `${time(first)} to ${time(last)}`,
          first.isClear ? 'yes' : 'NO',
          String(Math.max(...stretch.map(({ violations }) => violations))),
          closest === undefined ? 'none' : kilometers(closest.missDistanceM),
          mostProbable === undefined ? 'none' : exponentText(mostProbable.collisionProbability as number, 1),
        ],
        first.isClear ? '' : padOrCut(terminalText(why(stretch)), room).trimEnd(),
      ).trimEnd();
    }),
    'Breach: encounters that break a limit. All figures: the worst of the liftoffs on the line.',
  ];
}

/** The broken limits of a stretch, and the object that breaks them worst. */
function why(stretch: readonly LiftoffRow[]): string {
  const broken = (Object.keys(SHORT) as BrokenLimit[]).filter((limit) =>
    stretch.some((row) => row.broken.includes(limit)),
  );
  const { closest, mostProbable } = worstIn(stretch);
  const worst = broken.includes('too probable') ? mostProbable : closest;
  return `${broken.map((limit) => SHORT[limit]).join(', ')}${worst === undefined ? '' : `: ${worst.object2Designator}`}`;
}

function worstIn(rows: readonly LiftoffRow[]): {
  closest: LiftoffEncounter | undefined;
  mostProbable: LiftoffEncounter | undefined;
} {
  const first = (
    encounters: readonly LiftoffEncounter[],
    isWorse: (a: LiftoffEncounter, b: LiftoffEncounter) => boolean,
  ) =>
    encounters.reduce<LiftoffEncounter | undefined>(
      (worst, each) => (worst === undefined || isWorse(each, worst) ? each : worst),
      undefined,
    );
  return {
    closest: first(
      rows.flatMap(({ closest }) => closest ?? []),
      (a, b) => a.missDistanceM < b.missDistanceM,
    ),
    mostProbable: first(
      rows.flatMap(({ mostProbable }) => mostProbable ?? []),
      (a, b) => (a.collisionProbability as number) > (b.collisionProbability as number),
    ),
  };
}

/** Closest and most probable encounter of a liftoff that has any. */
function worstOf(row: LiftoffRow): string {
  const closest = row.closest as LiftoffEncounter;
  const probable = row.mostProbable;
  const closestText = `closest ${kilometers(closest.missDistanceM)} km (${other(closest)}, ${closest.object1Designator})`;
  if (probable === undefined) return `${closestText}; no probability can be given`;
  const highest = `highest probability ${exponentText(probable.collisionProbability as number, 1)}`;
  const isSame =
    probable.object1Designator === closest.object1Designator &&
    probable.object2Designator === closest.object2Designator &&
    probable.tcaMs === closest.tcaMs;
  return `${closestText}, ${highest}${isSame ? '' : ` (${other(probable)}, ${probable.object1Designator})`}`;
}

function other({ object2Designator, object2Name }: LiftoffEncounter): string {
  return `${object2Designator} ${object2Name}`.trimEnd();
}

function kilometers(meters: number): string {
  return (meters / 1000).toFixed(meters < 10_000 ? 2 : 1);
}

function minutes(slipMs: number): string {
  const value = slipMs / 60_000;
  const text = Number.isInteger(value) ? String(Math.abs(value)) : Math.abs(value).toFixed(2);
  return value === 0 ? '0' : `${value > 0 ? '+' : '-'}${text}`;
}

function counted(count: number, what: string): string {
  return `${count} ${what}${count === 1 ? '' : 's'}`;
}

function upperFirst(text: string): string {
  return text[0].toUpperCase() + text.slice(1);
}

/** To the second, without a fraction. */
function shortUtc(ms: number): string {
  return formatUtc(Math.round(ms / 1000) * 1000).replace('.000Z', 'Z');
}
