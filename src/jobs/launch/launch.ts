import { LAUNCH_CAUTION } from '../../caution.js';
import { isBatchDesignator } from '../../elements/batch-designator.js';
import { formatUtc } from '../../elements/utc.js';
import { slabCount } from '../../encounters/search-problem.js';
import { enclosingRadiusKm } from '../../encounters/volume.js';
import { loadSgp4 } from '../../ephemeris/sgp4-module.js';
import { type BatchObjectRow, writeBatchObjectsCsv } from '../../tables/batch-objects-csv.js';
import { writeBatchPairsCsv } from '../../tables/batch-pairs-csv.js';
import { writeSlipsCsv } from '../../tables/slips-csv.js';
import { formatConjunctionTable, formatElementAges, formatFileCounts } from '../../tables/terminal-table.js';
import { terminalText, wrapWords } from '../../tables/terminal-text.js';
import { sigmaAt } from '../../uncertainty/sigma-table.js';
import { companionRow } from '../companion-row.js';
import { agesAt, agesOf, warnOfOldElements } from '../element-ages.js';
import { failedLines, warnOfFailures } from '../failed-sets.js';
import { readElementInputs, readKnowledge } from '../inputs.js';
import { alertLines, resultsLine } from '../outcome-lines.js';
import { type OutputFolder, withOutputFolder } from '../output-folder.js';
import { publishRun, writeResults } from '../publish-run.js';
import type { RankedRecords } from '../ranked-records.js';
import type { JobPorts } from '../screen-options.js';
import { type ObjectKnowledge, type ScreenedObject, screenedObjects } from '../screened-object.js';
import { searchAndRank } from '../search-and-rank.js';
import { withSearchWorkers } from '../search-in-workers.js';
import { createTimings } from '../timings.js';
import { warnOfUnlisted } from '../unlisted-objects.js';
import { batchObjects } from './batch-objects.js';
import { probablySame } from './flying-along.js';
import { injectionCurve } from './injection-sigma.js';
import type { LaunchOptions, LaunchOutcome } from './launch-options.js';
import { liftoffLines } from './liftoff-lines.js';
import { liftoffRows, withBestRank } from './liftoff-rows.js';
import { liftoffSearch } from './liftoff-search.js';
import { pairLines, pairRows } from './pair-rows.js';
import type { BatchPhases } from './phases.js';
import { expectBatchNear } from './read-batch.js';
import { readLaunch } from './read-launch.js';
import { recordedLaunchOptions } from './run-options.js';
import { slipsOf } from './slip.js';
import { slippedRows } from './slipped-rows.js';
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
  return withOutputFolder(options.outPath, ports, (folder) => launchInto(folder, options, ports, startedMs));
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

  await loadSgp4();
  const nominal = batchObjects(phases, knowledge, injectionCurve(options.injection));
  const others = screenedObjects([...inputs.fleet, ...inputs.catalog], knowledge);
  warnOfUnlisted(knowledge.listed, options.objectsPath, [...nominal, ...others], ports);
  warnOfIdleSigmas(knowledge, nominal, ports);
  const tooSmall = volumeWarning(nominal, options.volume, endMs);
  if (tooSmall !== undefined) ports.log.warn(tooSmall.warning);
  const searchOf = (slipsMs: readonly number[], onlyProbability: boolean) =>
    liftoffSearch(slipsMs, nominal, others, window, { ...options, onlyProbability });
  const batchCount = new Set(nominal.map(({ designator }) => designator)).size;
  const missKm = enclosingRadiusKm(options.volume);
  const threads = Math.min(options.workers, slabCount(window));
  const searched = await withSearchWorkers(threads, ports, async (workers) => {
    // On its own, so that its figures are to the last digit those of a run without slips.
    const planned = searchOf([0], false);
    const { objects, flying } = planned;
    timings.end('preparing');
    ports.log.info(
      `searching ${formatUtc(startMs)} to ${formatUtc(endMs)}: ${batchCount} of the batch, ${objects.length - nominal.length} of ${others.length} others within reach`,
    );
    const search = await searchAndRank(
      planned.plan,
      objects,
      window,
      workers,
      timings,
      identitiesOf(objects),
    );
    for (const { designator, detail } of search.failed) {
      if (isBatchDesignator(designator)) ports.log.warn(`batch, ${designator}: ${detail}`);
    }
    warnOfFailures(search.failed, inputs.fleet, ports);
    const same = probablySame(flying, objects);
    const pairs = pairRows(
      nominal,
      [...new Set(flying.map(({ second }) => objects[second]))],
      { startMs, endMs, limitKm: missKm },
      (designator, other) =>
        same.some((pair) => objects[pair.first].designator === designator && objects[pair.second] === other),
    );
    timings.end('pairs');

    const unranked = liftoffRows(planned, search.outcome.records, options.liftoffMs, options.limits);
    unranked.push(
      ...(await slippedRows(
        slips.filter((slipMs) => slipMs !== 0),
        (slipsMs) => searchOf(slipsMs, true),
        nominal.length,
        new Set([...search.outcome.lastMsOf.keys()].map((index) => objects[index].set.source)),
        workers,
        options,
        ports,
      )),
    );
    timings.end('slips');
    const liftoffs = withBestRank(unranked.sort((one, other) => one.slipMs - other.slipMs));
    return { objects, flying, search, same, pairs, liftoffs };
  });
  const { objects, flying, search, same, pairs, liftoffs } = searched;
  const { outcome, ranked, failed } = search;

  await writeBatchPairsCsv(folder.stream('batch-pairs.csv'), pairs);
  await writeSlipsCsv(folder.stream('slips.csv'), liftoffs);
  await writeBatchObjectsCsv(
    folder.stream('batch-objects.csv'),
    phases.map((phase, k) => batchRow(phase, nominal[k], endMs)),
  );
  const companions = same.map((pair) => companionRow(pair, objects, ['probably-same-object']));
  const unused = [...batch.rejected, ...inputs.unused, ...failed];
  const messages = await writeResults(folder, { ranked, companions, unused }, window, options, ports);
  timings.end('writing');

  const facts = {
    command: 'launch',
    options: recordedLaunchOptions(options),
    inputs: { elements: [...batch.files, ...inputs.files], others: [...tables, ...otherFiles] },
    elementAges: { fleet: agesOf(inputs.fleet, startMs), catalog: agesOf(inputs.catalog, startMs) },
    sigmaSource: `${options.sigmaPath ?? 'built-in table'}; batch: injection sigmas and their growth, see batch-objects.csv`,
    counts: {
      batch: batchCount,
      batchSets: nominal.length,
      others: others.length,
      othersWithinReach: objects.length - nominal.length,
      failedInWindow: outcome.lastMsOf.size,
      encounters: ranked.count,
      pairsRefined: outcome.pairsRefined,
      flyingAlong: flying.length,
      probablySame: same.length,
      batchPairs: pairs.length,
      gaps: window.gaps.length,
      liftoffs: liftoffs.length,
      clearLiftoffs: liftoffs.filter(({ isClear }) => isClear).length,
      messages,
    },
    comparedWith: null,
    settingsChanged: null,
  };
  const { alertPc } = options.limits;
  const { files, alertReached } = publishRun(
    folder,
    { options, alertPc, window, search, facts, caution: LAUNCH_CAUTION, startedMs, timings },
    ports,
  );

  const lines = [
    ...liftoffLines(liftoffs, options.limits),
    ...(tooSmall === undefined ? [] : wrapWords(terminalText(tooSmall.note), COLUMNS)),
    '',
    `With the nominal liftoff, ${formatUtc(options.liftoffMs)}:`,
    ...alertLines(forTerminal(ranked), alertPc),
    formatConjunctionTable(forTerminal(ranked), options.top),
    ...pairLines(pairs, missKm).flatMap((line) => wrapWords(terminalText(line), COLUMNS)),
    ...sameLines(same, objects).flatMap((line) => wrapWords(terminalText(line), COLUMNS)),
    '',
    formatFileCounts([...batch.files, ...inputs.files]),
    ...failedLines(outcome.lastMsOf.size),
    ...(inputs.fleet.length === 0 ? [] : [formatElementAges('Fleet', agesAt(inputs.fleet, startMs))]),
    ...(inputs.catalog.length === 0 ? [] : [formatElementAges('Catalog', agesAt(inputs.catalog, startMs))]),
    resultsLine(options.outPath, files),
    LAUNCH_CAUTION,
  ];
  return { lines: lines.map((line) => line.replace(/\n$/, '')), alertReached };
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
