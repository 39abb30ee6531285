import { CAUTION } from '../../caution.js';
import type { UnusedElements } from '../../elements/element-set.js';
import { formatUtc } from '../../elements/utc.js';
import { terminalText, wrapWords } from '../../tables/terminal-text.js';
import { AGE_KNOTS_DAYS } from '../../uncertainty/calibrate-age-knots.js';
import { differenceSigmaM } from '../../uncertainty/calibrate-growth-law.js';
import type { SigmaClassBounds } from '../../uncertainty/sigma-table.js';
import type { AgeBin } from './age-bins.js';
import { type Coverage, coverageCount, coverageShares, GAUSSIAN_SHARES, sumOfCoverages } from './coverage.js';
import {
  BIAS_SIGMAS,
  CLASS_DEMAND,
  type ErrorGrowth,
  MIN_KNOTS,
  MIN_REACH_DAYS,
  OBJECT_DEMAND,
  tableSigmaRtnM,
} from './error-growth.js';
import { HELD_BACK_RULE } from './held-back.js';
import type { FileTally } from './history-counts.js';
import type { Standing } from './object-result.js';
import type { ClassResult } from './sigma-table-csv.js';

const COLUMNS = 100;
const AXES = ['R', 'T', 'N'];
const MOST_LISTED = 20;

export type PairCounts = {
  readonly fitted: number;
  readonly heldBack: number;
  readonly acrossManeuver: number;
  readonly intoHeldBack: number;
  readonly failed: number;
};

/** Everything that the report tells. */
export type CalibrationSummary = {
  readonly files: number;
  readonly tally: FileTally;
  /** Epochs of the first and the last set; `undefined` when there is none. */
  readonly epochsMs: { readonly first: number; readonly last: number } | undefined;
  readonly objects: Readonly<Record<Standing, number>>;
  readonly maneuvers: number;
  readonly objectsWithManeuvers: number;
  readonly pairs: PairCounts;
  readonly classes: readonly ClassResult[];
  /** Held-back differences against the rows of their own objects. */
  readonly ownCoverage: Coverage;
  /** Held-back differences of the other objects against the rows of their class. */
  readonly othersCoverage: Coverage;
  /** Held-back differences of all objects against the rows of their class, in the order of `classes`. */
  readonly classCoverages: readonly Coverage[];
  /** Held-back differences for which the table has no row. */
  readonly uncheckedHeldBack: number;
  /** Designators of the biased objects, ascending. */
  readonly biased: readonly number[];
  readonly commonErrorFactor: number;
  readonly rejectedExamples: readonly UnusedElements[];
  /** Names of the other files with results, by what is in them. */
  readonly paths: Readonly<Record<'table' | 'bins' | 'maneuvers' | 'inputs' | 'unused' | 'report', string>>;
};

/** The few lines for the terminal. */
export function shortReport(summary: CalibrationSummary): string[] {
  const { tally, objects, paths } = summary;
  const coverage = sumOfCoverages([summary.ownCoverage, summary.othersCoverage]);
  return [
    setsLine(summary),
    `Objects: ${objectCount(summary)}, ${objects['own rows']} with rows of their own; classes with rows: ${classCount(summary)}.`,
    `Maneuvers recognized: ${summary.maneuvers}, of ${summary.objectsWithManeuvers} objects; ${summary.pairs.acrossManeuver} pairs across them left out.`,
    ...coverageTable('Held-back differences', [['within 1, 2, 3 sigma', coverage, undefined]]),
    `Common-error factor: ${summary.commonErrorFactor}. Differences cannot show errors that both sets share.`,
    `Table: ${paths.table}. Report: ${paths.report}.${tally.rejected > 0 ? ` Rejected sets: ${paths.unused}.` : ''}`,
    CAUTION,
  ];
}

/** The whole report as text. */
export function fullReport(summary: CalibrationSummary): string {
  const lines = [
    'Position errors of public element sets, measured on their own history',
    ...paragraph(CAUTION),
    '',
    ...heading('What was read'),
    ...readPart(summary),
    '',
    ...heading('Maneuvers'),
    ...maneuverPart(summary),
    '',
    ...heading('Rows of the table'),
    ...rowsPart(summary),
    '',
    ...heading('Does the fit cover what it has not seen?'),
    ...coveragePart(summary),
    '',
    ...heading('Classes of orbits'),
    ...paragraph(
      'Those of the built-in table; a class without rows keeps its built-in figures in a screening. An orbit ' +
        'belongs to the first class that covers it.',
    ),
    '',
    ...summary.classes.flatMap((each, i) => classPart(each, i + 1, summary.commonErrorFactor)),
    ...emptyClassesPart(summary.classes),
    ...heading('Bias'),
    ...biasPart(summary),
    '',
    ...heading('What differences cannot show'),
    ...limitsPart(summary),
    '',
    ...heading('How it was done'),
    ...methodPart(),
  ];
  return `${lines.join('\n')}\n`;
}

function readPart(summary: CalibrationSummary): string[] {
  const { tally, epochsMs, pairs, paths } = summary;
  return [
    setsLine(summary),
    ...(epochsMs === undefined
      ? []
      : [`Epochs from ${formatUtc(epochsMs.first)} to ${formatUtc(epochsMs.last)}.`]),
    ...table([
      ['sets read', tally.read],
      ['  in pairs', tally.paired],
      ['  sound, but without a partner in any age window', tally.unpaired],
      ['  copies of sets that stand elsewhere in the history', tally.copies],
      ['  superseded: object and epoch of another set, other elements', tally.superseded],
      ['  rejected', tally.rejected],
      ['pairs in the fits', pairs.fitted],
      ['pairs held back to check the fits', pairs.heldBack],
      ['pairs left out: a maneuver between the sets', pairs.acrossManeuver],
      ['pairs left out: only the newer set belongs to the part held back', pairs.intoHeldBack],
      ['pairs lost: SGP4 gave up on the older set before', pairs.failed],
    ]),
    `The counts by file are in ${paths.inputs}, superseded and rejected sets in ${paths.unused}.`,
    ...(summary.rejectedExamples.length === 0 ? [] : ['The first rejected sets:']),
    ...summary.rejectedExamples.map(({ source, detail }) =>
      terminalText(`  ${source.file}, line ${source.line}: ${detail}`),
    ),
  ];
}

function maneuverPart({ maneuvers, objectsWithManeuvers, pairs, paths }: CalibrationSummary): string[] {
  return paragraph(
    `${maneuvers} changes of orbit recognized, of ${objectsWithManeuvers} objects; ${pairs.acrossManeuver} ` +
      `pairs across them left out. They are listed in ${paths.maneuvers}. A change counts when the mean ` +
      'semi-major axis or the plane jumps by more than 6 robust sigmas of the neighboring steps and the pairs ' +
      'that skip a set confirm it. A magnetic storm can look the same; burns below the scatter of the elements ' +
      'and thrust that never pauses are not recognized.',
  );
}

function rowsPart(summary: CalibrationSummary): string[] {
  const { objects } = summary;
  return [
    ...table([
      ['objects', objectCount(summary)],
      ['  with rows of their own', objects['own rows']],
      ['  with the rows of their class: too few pairs', objects['too few pairs']],
      ['  with the rows of their class: biased', objects.biased],
      ['classes with rows', classCount(summary)],
      [
        'classes that keep their built-in figures: too few pairs',
        summary.classes.length - classCount(summary),
      ],
    ]),
    ...(objects['own rows'] + classCount(summary) === 0
      ? ['No row at all: the table is not written, one from before is left as it is.']
      : []),
    ...paragraph(
      `An age counts for an object with at least ${OBJECT_DEMAND.minSamples} pairs, ` +
        `${OBJECT_DEMAND.minDisjoint} of them disjoint in time; for a class with ${CLASS_DEMAND.minSamples} pairs, ` +
        `${CLASS_DEMAND.minDisjoint} disjoint, of ${CLASS_DEMAND.minObjects} objects. Rows need ${MIN_KNOTS} such ages, ` +
        `the last of ${MIN_REACH_DAYS} days or more.`,
    ),
    ...paragraph(
      `Common-error factor: ${summary.commonErrorFactor}. All sigmas of the table are multiplied by it; all ` +
        'figures of this report that are not called table sigma are without it.',
    ),
  ];
}

function coveragePart(summary: CalibrationSummary): string[] {
  const { ownCoverage, othersCoverage, classCoverages } = summary;
  const all = sumOfCoverages([ownCoverage, othersCoverage]);
  if (coverageCount(all) === 0) {
    return paragraph(
      'No held-back difference belongs to a row of the table: the fit is unchecked. A longer history mends that.',
    );
  }
  return [
    ...paragraph(
      `Held back: ${HELD_BACK_RULE}; no set of a block held back takes part in a fit. Share of the differences ` +
        'within 1, 2 and 3 sigma of zero, per axis, in percent; a Gaussian has 68.3, 95.4 and 99.7. More within ' +
        '1 sigma than that and fewer within 3 means longer tails than a Gaussian has.',
    ),
    ...coverageTable('Rows used', [
      ['as a screening uses them', all, undefined],
      ['  rows of the object', ownCoverage, undefined],
      ['  rows of its class', othersCoverage, undefined],
      ['always those of the class', sumOfCoverages(classCoverages), undefined],
      ...classCoverages.map((coverage, i) => [`  class ${i + 1} below`, coverage, undefined] as const),
    ]),
    '',
    ...coverageTable(
      'Age, days',
      AGE_KNOTS_DAYS.map((age, knot) => [String(age), all, knot]),
    ),
    ...(summary.uncheckedHeldBack === 0
      ? []
      : [`${summary.uncheckedHeldBack} held-back differences have no row in the table.`]),
  ];
}

function classPart({ orbitClass, bins, growth }: ClassResult, number: number, factor: number): string[] {
  const rows = AGE_KNOTS_DAYS.flatMap((age, knot) => {
    const bin = bins[knot];
    if (bin === undefined) return [];
    return [
      [
        String(age),
        String(bin.samples),
        String(bin.disjoint),
        String(bin.objects),
        ...bin.biasRtnM.map(meters),
        ...bin.sigmaRtnM.map(meters),
        ...tableCells(growth, knot, factor),
      ],
    ];
  });
  if (rows.length === 0) return [];
  return [
    `${number}. ${classInWords(orbitClass)}`,
    ...aligned([
      ['age d', 'pairs', 'disjoint', 'objects', ...perAxis('bias'), ...perAxis('diff'), ...perAxis('table')],
      ...rows,
    ]),
    growth === undefined ? '  no rows: too few pairs' : `  ${misfit(bins, growth)}`,
    '',
  ];
}

function emptyClassesPart(classes: readonly ClassResult[]): string[] {
  const empty = classes.flatMap(({ orbitClass, bins }, i) =>
    bins.every((bin) => bin === undefined) ? [`  ${i + 1}. ${classInWords(orbitClass)}`] : [],
  );
  return empty.length === 0 ? [] : ['Without any pair:', ...empty, ''];
}

function tableCells(growth: ErrorGrowth | undefined, knot: number, factor: number): string[] {
  if (growth === undefined || !growth.knots.includes(knot)) return ['-', '-', '-'];
  return tableSigmaRtnM(growth, AGE_KNOTS_DAYS[knot]).map((sigma) => meters(sigma * factor));
}

function misfit(bins: ReadonlyArray<AgeBin | undefined>, growth: ErrorGrowth): string {
  const ratios = growth.knots.flatMap((knot) => {
    const { ageDays, sigmaRtnM } = bins[knot]!;
    return growth.laws.map((law, axis) => differenceSigmaM(law, ageDays) / sigmaRtnM[axis]);
  });
  return `fitted over measured sigma: ${Math.min(...ratios).toFixed(2)} to ${Math.max(...ratios).toFixed(2)}`;
}

function biasPart({ biased, paths }: CalibrationSummary): string[] {
  const listed = biased.slice(0, MOST_LISTED).join(', ');
  return paragraph(
    'The median of older minus newer set, in the tables above and, object by object, in ' +
      `${paths.bins}. The sigmas are taken about it: it is not in the table, and a screening does not take it ` +
      `off. Objects whose bias exceeds ${BIAS_SIGMAS} sigma (and three standard errors) at some age would ` +
      'not be covered by a sigma of their own and have the rows of their class: ' +
      (biased.length === 0
        ? 'none.'
        : `${biased.length}, ${listed}${biased.length > MOST_LISTED ? ', ...' : ''}. Steady thrust or a drag term ` +
          'that is wrong in one direction does that; no sigma of the table need cover them.'),
  );
}

function limitsPart({ commonErrorFactor }: CalibrationSummary): string[] {
  return [
    ...paragraph(
      'Errors that both sets of a pair share cancel in their difference: faults of the model (SGP4 leaves out ' +
        'most of the gravity field, and all sets are fitted with it), a wrong position of the origin or of time, ' +
        'sensor biases, and observations that two sets fitted to overlapping arcs have in common. The sigmas ' +
        'are therefore lower limits of the error against the true orbit. Where precise orbits of some objects ' +
        'are at hand, compare, and give the ratio as --common-error-factor; it is ' +
        `${commonErrorFactor}${commonErrorFactor === 1 ? ', which adds nothing' : ''}.`,
    ),
    ...paragraph(
      'The history is taken to speak for the future: sigmas from a quiet Sun are too small for an active one.',
    ),
  ];
}

function methodPart(): string[] {
  return [
    ...paragraph(
      `Each set is propagated (SGP4) to the epoch of the later set of the same object that is nearest to each ` +
        `age of ${AGE_KNOTS_DAYS.join(', ')} days, within a fifth of it. Differences are older minus newer in RTN ` +
        'of the newer. Bias is their median, sigma 1.4826 times the median absolute deviation from it, for an ' +
        'object times n / (n - 0.8) with n disjoint pairs. In a class every object weighs the same.',
    ),
    ...paragraph(
      'The variance is fitted by a sum of powers 0, 1, 1.5, 2, ... 4 of the age without negative ' +
        'coefficients, per axis: it never shrinks with age. A difference carries the error of the newer set at ' +
        'its own epoch as well: for independent errors var(difference at age t) = var(t) + var(0), and ' +
        'var(difference at 0) = 2 var(0). Half of the constant term is therefore taken off for the table. Its row ' +
        'at age 0 is the fit carried there, but at least a tenth of the first sigma measured.',
    ),
  ];
}

function setsLine({ files, tally }: CalibrationSummary): string {
  return (
    `Read ${tally.read} sets from ${files} ${files === 1 ? 'file' : 'files'}: ${tally.paired} in pairs, ${tally.unpaired} without a partner, ` +
    `${tally.copies} copies, ${tally.superseded} superseded, ${tally.rejected} rejected.`
  );
}

function coverageTable(
  head: string,
  rows: ReadonlyArray<readonly [label: string, coverage: Coverage, knot: number | undefined]>,
): string[] {
  const shares = (coverage: Coverage, knot: number | undefined) =>
    AXES.flatMap((_, axis) => coverageShares(coverage, axis, knot).map(percent));
  const filled = rows.filter(([, coverage, knot]) => coverageCount(coverage, knot) > 0);
  return aligned([
    [head, 'pairs', ...AXES.flatMap((axis) => [`${axis} 1s`, '2s', '3s'])],
    ...filled.map(([label, coverage, knot]) => [
      label,
      String(coverageCount(coverage, knot)),
      ...shares(coverage, knot),
    ]),
    ['Gaussian', '', ...AXES.flatMap(() => GAUSSIAN_SHARES.map(percent))],
  ]);
}

function objectCount({ objects }: CalibrationSummary): number {
  return objects['own rows'] + objects['too few pairs'] + objects.biased;
}

function classCount({ classes }: CalibrationSummary): number {
  return classes.filter(({ growth }) => growth !== undefined).length;
}

function classInWords(bounds: SigmaClassBounds): string {
  return [
    `perigee ${rangeInWords(bounds.perigeeMinKm, bounds.perigeeMaxKm)} km`,
    ...(Number.isFinite(bounds.eccentricityMax) ? [`eccentricity below ${bounds.eccentricityMax}`] : []),
    `inclination ${rangeInWords(bounds.inclinationMinDeg, bounds.inclinationMaxDeg)} deg`,
  ].join(', ');
}

function rangeInWords(low: number, high: number): string {
  if (!Number.isFinite(high)) return Number.isFinite(low) ? `from ${low}` : 'of any';
  return Number.isFinite(low) ? `${low} to ${high}` : `below ${high}`;
}

function perAxis(name: string): string[] {
  return AXES.map((axis) => `${name} ${axis}`);
}

function meters(value: number): string {
  return String(Math.round(value));
}

function percent(share: number): string {
  return (share * 100).toFixed(1);
}

function heading(text: string): string[] {
  return [text, '-'.repeat(text.length)];
}

function paragraph(text: string): string[] {
  return wrapWords(text, COLUMNS);
}

function table(rows: ReadonlyArray<readonly [string, number]>): string[] {
  const width = Math.max(...rows.map(([label]) => label.length));
  const digits = Math.max(...rows.map(([, count]) => String(count).length));
  return rows.map(([label, count]) => `  ${label.padEnd(width)}  ${String(count).padStart(digits)}`);
}

/** The first column to the left, the others to the right. */
function aligned(rows: ReadonlyArray<readonly string[]>): string[] {
  const widths = rows[0].map((_, column) => Math.max(...rows.map((row) => row[column].length)));
  return rows.map(
    (row) =>
      `  ${row.map((cell, column) => (column === 0 ? cell.padEnd(widths[0]) : cell.padStart(widths[column]))).join('  ')}`,
  );
}
