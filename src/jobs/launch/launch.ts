import { LAUNCH_CAUTION } from '../../caution.js';
import { isBatchDesignator } from '../../elements/batch-designator.js';
import { formatUtc } from '../../elements/utc.js';
import { enclosingRadiusKm } from '../../encounters/volume.js';
import { InputError } from '../../input-error.js';
import { type BatchObjectRow, writeBatchObjectsCsv } from '../../tables/batch-objects-csv.js';
import { writeBatchPairsCsv } from '../../tables/batch-pairs-csv.js';
import { writeCompanionsCsv } from '../../tables/companions-csv.js';
import { writeSlipsCsv } from '../../tables/slips-csv.js';
import { formatConjunctionTable, formatElementAges, formatFileCounts } from '../../tables/terminal-table.js';
import { terminalText, wrapWords } from '../../tables/terminal-text.js';
import { writeUnusedElementsCsv } from '../../tables/unused-elements-csv.js';
import { sigmaAt } from '../../uncertainty/sigma-table.js';
import { companionRow } from '../companion-row.js';
import { agesAt, agesOf, warnOfOldElements } from '../element-ages.js';
import { FIELD, FIELDS } from '../encounter-records.js';
import { failedLines, failedSets, warnOfFailures } from '../failed-sets.js';
import { type OtherFile, readElementInputs, readKnowledge } from '../inputs.js';
import { alertLines, resultsLine } from '../outcome-lines.js';
import { type OutputFolder, openOutputFolder } from '../output-folder.js';
import { fillPairProbabilities } from '../pair-probabilities.js';
import { type RankedRecords, rankedRecords, writeRankedTables } from '../ranked-records.js';
import { RUN_RECORD } from '../run-folder.js';
import { environmentOf, runRecordText } from '../run-record.js';
import type { JobPorts } from '../screen-options.js';
import { type ObjectKnowledge, type ScreenedObject, screenedObject } from '../screened-object.js';
import { searchFacts } from '../search-facts.js';
import { type SearchOutcome, searchInWorkers } from '../search-in-workers.js';
import { createTimings } from '../timings.js';
import { warnOfUnlisted } from '../unlisted-objects.js';
import { writeMessages } from '../write-messages.js';
import { batchObjects } from './batch-objects.js';
import { probablySame } from './flying-along.js';
import { injectionCurve } from './injection-sigma.js';
import type { LaunchOptions, LaunchOutcome } from './launch-options.js';
import { liftoffLines } from './liftoff-lines.js';
import { liftoffRows, type UnrankedLiftoff, withBestRank } from './liftoff-rows.js';
import { type LiftoffSearch, liftoffSearch, slipGroups } from './liftoff-search.js';
import { pairLines, pairRows } from './pair-rows.js';
import { type BatchPhases, batchPhases, gapLine } from './phases.js';
import { type Batch, expectBatchNear, readBatch } from './read-batch.js';
import { readText } from './read-table.js';
import { readReleaseTimes } from './release-times.js';
import { recordedLaunchOptions } from './run-options.js';
import { slipsOf } from './slip.js';
import { readValidity } from './validity.js';
import { volumeWarning } from './volume-warning.js';

const MS_PER_DAY = 86_400_000;
const COLUMNS = 100;
/** Objects told one by one on the terminal. */
const SAME_SHOWN = 5;

/**
 * Screens a launch batch against fleet and catalog and against itself, for the nominal liftoff and for as many
 * slips of it as asked, and leaves everything in the output folder.
 *
 * @throws InputError for input that cannot be used; RunLockedError when another run holds the output
 */
export async function launch(options: LaunchOptions, ports: JobPorts): Promise<LaunchOutcome> {
  const startedMs = ports.nowMs();
  const folder = await openOutputFolder(options.outPath, ports);
  try {
    return await launchInto(folder, options, ports, startedMs);
  } finally {
    folder.close();
  }
}

async function launchInto(
  folder: OutputFolder,
  options: LaunchOptions,
  ports: JobPorts,
  startedMs: number,
): Promise<LaunchOutcome> {
  const timings = createTimings();
  const slips = slipsOf(options.slips);
  const { batch, window, tables } = await readLaunch(options, ports);
  const { startMs, endMs, phases } = window;
  expectBatchNear(phases, options.maxAgeDays);
  const inputs = await readElementInputs(options.fleetPaths, options.catalogPaths, startMs);
  const { knowledge, files: otherFiles } = await readKnowledge(options.objectsPath, options.sigmaPath);
  warnOfOldElements({ fleet: inputs.fleet, catalog: inputs.catalog }, startMs, options.maxAgeDays, ports);
  timings.end('reading');

  const nominal = batchObjects(phases, knowledge, injectionCurve(options.injection));
  const others = [...inputs.fleet, ...inputs.catalog].map((set) => screenedObject(set, knowledge));
  warnOfUnlisted(knowledge.listed, options.objectsPath, [...nominal, ...others], ports);
  warnOfIdleSigmas(knowledge, nominal, ports);
  const tooSmall = volumeWarning(nominal, options.volume, endMs);
  if (tooSmall !== undefined) ports.log.warn(tooSmall.warning);
  const searchOf = (slipsMs: readonly number[], onlyProbability: boolean) =>
    liftoffSearch(slipsMs, nominal, others, window, { ...options, onlyProbability });
  // On its own, so that its figures are to the last digit those of a run without slips.
  const search = searchOf([0], false);
  timings.end('preparing');

  ports.log.info(
    `searching ${formatUtc(startMs)} to ${formatUtc(endMs)}: ${new Set(nominal.map(({ designator }) => designator)).size} of the batch, ${search.objects.length - nominal.length} of ${others.length} others within reach`,
  );
  const outcome = await searchInWorkers(search.plan, options.workers, ports);
  timings.end('searching');

  const { records } = outcome;
  fillPairProbabilities(records, search.objects.length, identitiesOf(search.objects));
  const ranked = rankedRecords(records, search.objects);
  const failed = failedSets(outcome, search.objects, startMs, endMs);
  for (const { designator, detail } of failed) {
    if (isBatchDesignator(designator)) ports.log.warn(`batch, ${designator}: ${detail}`);
  }
  warnOfFailures(failed, inputs.fleet, ports);
  const same = probablySame(search.flying, search.objects);
  const missKm = enclosingRadiusKm(options.volume);
  const pairs = pairRows(
    nominal,
    [...new Set(search.flying.map(({ second }) => search.objects[second]))],
    { startMs, endMs, limitKm: missKm },
    (designator, other) =>
      same.some(
        (pair) =>
          search.objects[pair.first].designator === designator && search.objects[pair.second] === other,
      ),
  );
  timings.end('pairs');

  const unranked = liftoffRows(search, records, options.liftoffMs, options.limits);
  unranked.push(
    ...(await slippedRows(
      slips.filter((slipMs) => slipMs !== 0),
      (slipsMs) => searchOf(slipsMs, true),
      nominal.length,
      new Set([...outcome.lastMsOf.keys()].map((index) => search.objects[index].set.source)),
      options,
      ports,
    )),
  );
  const liftoffs = withBestRank(unranked.sort((a, b) => a.slipMs - b.slipMs));
  timings.end('slips');

  await writeRankedTables(folder, ranked);
  await writeBatchPairsCsv(folder.stream('batch-pairs.csv'), pairs);
  await writeSlipsCsv(folder.stream('slips.csv'), liftoffs);
  await writeBatchObjectsCsv(
    folder.stream('batch-objects.csv'),
    phases.map((phase, k) => batchRow(phase, nominal[k], endMs)),
  );
  await writeCompanionsCsv(
    folder.stream('companions.csv'),
    same.map((pair) => companionRow(pair, search.objects, ['probably-same-object'])),
  );
  await writeUnusedElementsCsv(folder.stream('unused-elements.csv'), [
    ...batch.rejected,
    ...inputs.unused,
    ...failed,
  ]);
  const messages = writeMessages(
    folder,
    ranked,
    options.cdmFromPc,
    { startMs, endMs, volume: options.volume },
    ports,
  );
  timings.end('writing');

  const highest =
    ranked.count === 0 ? Number.NaN : records.data[FIELDS * ranked.order[0] + FIELD.probability];
  const { alertPc } = options.limits;
  const alertReached = alertPc !== undefined && highest >= alertPc;
  let runFiles: readonly string[] = [];
  folder.seal((files) => {
    runFiles = [...files.map((file) => file.name), RUN_RECORD];
    return runRecordText(
      ports.version,
      {
        command: 'launch',
        options: recordedLaunchOptions(options),
        window: { startUtc: formatUtc(startMs), endUtc: formatUtc(endMs), days: options.days },
        inputs: { elements: [...batch.files, ...inputs.files], others: [...tables, ...otherFiles] },
        elementAges: { fleet: agesOf(inputs.fleet, startMs), catalog: agesOf(inputs.catalog, startMs) },
        search: searchFacts(outcome, options.volume),
        sigmaSource: `${options.sigmaPath ?? 'built-in table'}; batch: injection sigmas and their growth, see batch-objects.csv`,
        counts: {
          batch: new Set(nominal.map(({ designator }) => designator)).size,
          batchSets: nominal.length,
          others: others.length,
          othersWithinReach: search.objects.length - nominal.length,
          failedInWindow: outcome.lastMsOf.size,
          encounters: ranked.count,
          pairsRefined: outcome.pairsRefined,
          flyingAlong: search.flying.length,
          probablySame: same.length,
          batchPairs: pairs.length,
          gaps: window.gaps.length,
          liftoffs: liftoffs.length,
          clearLiftoffs: liftoffs.filter(({ isClear }) => isClear).length,
          messages,
        },
        alert: { highestProbability: Number.isNaN(highest) ? null : highest, reached: alertReached },
        comparedWith: null,
        environment: environmentOf(startedMs, ports.nowMs(), timings.seconds, options.workers),
      },
      files,
      LAUNCH_CAUTION,
    );
  });
  folder.publish();

  const lines = [
    ...liftoffLines(liftoffs, options.limits),
    ...(tooSmall === undefined ? [] : wrapWords(terminalText(tooSmall.note), COLUMNS)),
    '',
    `With the nominal liftoff, ${formatUtc(options.liftoffMs)}:`,
    ...alertLines(forTerminal(ranked), alertPc),
    formatConjunctionTable(forTerminal(ranked), options.top),
    ...pairLines(pairs, missKm).flatMap((line) => wrapWords(terminalText(line), COLUMNS)),
    ...sameLines(same, search.objects).flatMap((line) => wrapWords(terminalText(line), COLUMNS)),
    '',
    formatFileCounts([...batch.files, ...inputs.files]),
    ...failedLines(outcome.lastMsOf.size),
    ...(inputs.fleet.length === 0 ? [] : [formatElementAges('Fleet', agesAt(inputs.fleet, startMs))]),
    ...(inputs.catalog.length === 0 ? [] : [formatElementAges('Catalog', agesAt(inputs.catalog, startMs))]),
    resultsLine(options.outPath, runFiles),
    LAUNCH_CAUTION,
  ];
  return { lines: lines.map((line) => line.replace(/\n$/, '')), alertReached };
}

/** Batch, releases and validities as one. */
async function readLaunch(
  options: LaunchOptions,
  ports: Pick<JobPorts, 'log'>,
): Promise<{
  readonly batch: Batch;
  readonly window: BatchPhases;
  readonly tables: readonly OtherFile[];
}> {
  const { release, validityPath, liftoffMs } = options;
  const tables: OtherFile[] = [];
  const read = async (path: string) => {
    const { text, file } = await readText(path);
    tables.push(file);
    return text;
  };
  const batch = await readBatch(options.batchPaths);
  for (const warning of batch.warnings) ports.log.warn(warning);
  let releaseOf: (designator: string) => number;
  if ('ms' in release) {
    if (release.ms < liftoffMs) {
      throw new InputError(
        `--release is ${formatUtc(release.ms)}, before --liftoff at ${formatUtc(liftoffMs)}: check both`,
      );
    }
    releaseOf = () => release.ms;
  } else {
    const releases = readReleaseTimes(await read(release.path), release.path, batch.sets, liftoffMs);
    releaseOf = (designator) => releases.get(designator) as number;
  }
  const validity =
    validityPath === undefined
      ? undefined
      : readValidity(await read(validityPath), validityPath, options.batchPaths, batch.sets);
  const window = batchPhases(batch.sets, releaseOf, validity, validityPath, options.days);
  if (window.gaps.length > 0) ports.log.warn(gapLine(window.gaps, validityPath));
  return { batch, window, tables };
}

/** The rows of all liftoffs but the nominal one. */
async function slippedRows(
  slipsMs: readonly number[],
  searchOf: (slipsMs: readonly number[]) => LiftoffSearch,
  phaseCount: number,
  knownFailures: ReadonlySet<unknown>,
  options: LaunchOptions,
  ports: JobPorts,
): Promise<UnrankedLiftoff[]> {
  const rows: UnrankedLiftoff[] = [];
  if (slipsMs.length === 0) return rows;
  for (const group of slipGroups(slipsMs, phaseCount)) {
    const search = searchOf(group);
    ports.log.info(
      `searching ${group.length} more liftoffs, ${formatUtc(options.liftoffMs + group[0])} to ${formatUtc(options.liftoffMs + group[group.length - 1])}`,
    );
    const outcome = await searchInWorkers(search.plan, options.workers, ports);
    warnOfNewFailures(outcome, search.objects, knownFailures, ports);
    rows.push(...liftoffRows(search, outcome.records, options.liftoffMs, options.limits));
  }
  return rows;
}

/** `unused-elements.csv` is about the nominal liftoff; what fails only later must not go unsaid. */
function warnOfNewFailures(
  outcome: SearchOutcome,
  objects: readonly ScreenedObject[],
  known: ReadonlySet<unknown>,
  ports: Pick<JobPorts, 'log'>,
): void {
  for (const [index, lastMs] of outcome.lastMsOf) {
    const { set, designator, isPredicted } = objects[index];
    // A slip turns and delays the batch; it decays as it does with the nominal liftoff.
    if (isPredicted || known.has(set.source)) continue;
    ports.log.warn(
      `${set.source.file}:${set.source.line}: SGP4 gives no state of ${designator} after ${formatUtc(lastMs)}, within the window of a slipped liftoff: not met from then on`,
    );
  }
}

function warnOfIdleSigmas(
  { sigmas }: ObjectKnowledge,
  batch: readonly ScreenedObject[],
  ports: Pick<JobPorts, 'log'>,
): void {
  const present = new Set(batch.map(({ designator }) => designator));
  for (const [designator, { label }] of sigmas?.objects ?? []) {
    if (!isBatchDesignator(designator) || present.has(designator)) continue;
    ports.log.warn(`${label}: ${designator} is no object of the batch: check it against batch-objects.csv`);
  }
}

/** One number for all phases of an object. */
function identitiesOf(objects: readonly ScreenedObject[]): Int32Array {
  const first = new Map<string, number>();
  return Int32Array.from(objects, ({ designator, isPredicted }, index) => {
    if (!isPredicted) return index;
    const known = first.get(designator);
    if (known === undefined) first.set(designator, index);
    return known ?? index;
  });
}

function batchRow(
  { set, designator, numberInFile, releaseMs }: BatchPhases['phases'][number],
  object: ScreenedObject,
  endMs: number,
): BatchObjectRow {
  const screenedToMs = Math.min(object.validToMs, endMs);
  const sigmaAtTime = (ms: number) => sigmaAt(object.curve, (ms - object.agesFromMs) / MS_PER_DAY);
  return {
    designator,
    name: object.name,
    file: set.source.file,
    line: set.source.line,
    numberInFile,
    epochMs: set.epochMs,
    releaseMs,
    screenedFromMs: object.validFromMs,
    screenedToMs,
    sigmaFromRtnM: sigmaAtTime(object.validFromMs),
    sigmaToRtnM: sigmaAtTime(screenedToMs),
    sigmaSource: object.curve.isDefault ? `${object.curve.label}, built-in` : object.curve.label,
  };
}

/** A designator of the batch has the name in it already. */
function forTerminal({ count, at }: RankedRecords) {
  return {
    count,
    at: (index: number) => {
      const conjunction = at(index);
      return { ...conjunction, object1: { ...conjunction.object1, name: '' } };
    },
  };
}

function sameLines(same: ReturnType<typeof probablySame>, objects: readonly ScreenedObject[]): string[] {
  if (same.length === 0) return [];
  const lines = same.slice(0, SAME_SHOWN).map(({ first, second, farthestKm, fastestKmPerS }) => {
    const { designator, name } = objects[second];
    return `${`${designator} ${name}`.trimEnd()} is probably the same object as ${objects[first].designator}: within ${farthestKm.toFixed(1)} km and slower than ${(1000 * fastestKmPerS).toFixed(1)} m/s from the first day on. Told once, in companions.csv.`;
  });
  return same.length > SAME_SHOWN
    ? [...lines, `${same.length - SAME_SHOWN} more are probably the same: see companions.csv.`]
    : lines;
}
