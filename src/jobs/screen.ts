import { CAUTION } from '../caution.js';
import { expectCurrentFleet } from '../elements/age.js';
import { formatUtc } from '../elements/utc.js';
import { findCompanions } from '../encounters/companions.js';
import { pairKey, slabCount } from '../encounters/search-problem.js';
import { enclosingRadiusKm } from '../encounters/volume.js';
import { loadSgp4 } from '../ephemeris/sgp4-module.js';
import { writeChangesCsv } from '../tables/changes-csv.js';
import {
  formatCaution,
  formatConjunctionTable,
  formatElementAges,
  formatFileCounts,
} from '../tables/terminal-table.js';
import { changedSettingsLines } from './changed-settings.js';
import { changeLines } from './changes.js';
import { companionRow } from './companion-row.js';
import { changedSince, compareWithHistory, openHistory } from './compare-with-history.js';
import { agesAt, agesOf, warnOfOldElements } from './element-ages.js';
import { failedLines, warnOfFailures } from './failed-sets.js';
import { keepInHistory } from './history.js';
import { readElementInputs, readKnowledge } from './inputs.js';
import { alertLines, companionLines, finishedText, resultsLine, screenedLine } from './outcome-lines.js';
import { type OutputFolder, withOutputFolder } from './output-folder.js';
import { publishRun, writeResults } from './publish-run.js';
import { warnOfRejected } from './rejected-sets.js';
import { recordedOptions } from './run-record.js';
import type { JobPorts, ScreenOptions, ScreenOutcome } from './screen-options.js';
import { screenedObjects } from './screened-object.js';
import { searchAndRank, type Window } from './search-and-rank.js';
import { withSearchWorkers } from './search-in-workers.js';
import { rulesOfPlan, searchPlanOf } from './search-plan.js';
import { createTimings } from './timings.js';
import { warnOfUnlisted } from './unlisted-objects.js';
import { withinReach } from './within-reach.js';

const MS_PER_DAY = 86_400_000;
/** Changes told one by one on the terminal. */
const RISEN_SHOWN = 10;

/**
 * Screens a fleet against a catalog: reads and selects the element sets, searches the window, ranks the
 * encounters and leaves everything in the output folder.
 *
 * @throws InputError for input that cannot be used; RunLockedError when another run holds the output
 */
export async function screen(options: ScreenOptions, ports: JobPorts): Promise<ScreenOutcome> {
  const startedMs = ports.nowMs();
  return withOutputFolder(options.outPath, ports, (folder) => screenInto(folder, options, ports, startedMs));
}

async function screenInto(
  folder: OutputFolder,
  options: ScreenOptions,
  ports: JobPorts,
  startedMs: number,
): Promise<ScreenOutcome> {
  const timings = createTimings();
  const { startMs, historyPath } = options;
  const window = { startMs, endMs: startMs + Math.round(options.days * MS_PER_DAY) };
  const history = await openHistory(historyPath, startMs, ports);
  const previous = history.past[0]?.name;
  const read = await readScreened(options, ports);
  const inputs = { elements: read.inputs.files, others: read.otherFiles };
  const asked = { version: ports.version, options: recordedOptions(options), inputs };
  const changed = changedSince(history, asked, ports);
  timings.end('reading');

  const threads = Math.min(options.workers, slabCount(window));
  const { prepared, search } = await withSearchWorkers(threads, ports, async (workers) => {
    await loadSgp4();
    const ready = prepareSearch(read, options, window, ports);
    timings.end('preparing');
    const primaryCount = ready.primaries.length;
    ports.log.info(
      `searching ${formatUtc(startMs)} to ${formatUtc(window.endMs)}: ${primaryCount} ${options.allOnAll ? 'objects on each other' : 'of the fleet'}, ${ready.objects.length - primaryCount} of ${ready.others.length} others within reach`,
    );
    const found = await searchAndRank(ready.plan, ready.objects, window, workers, timings);
    return { prepared: ready, search: found };
  });
  const { primaries, others, objects } = prepared;
  const { outcome, ranked, failed } = search;
  warnOfFailures(failed, read.inputs.fleet, ports);

  const companions = prepared.companions.map((pair) => companionRow(pair, objects));
  const unused = [...read.inputs.unused, ...failed];
  const messages = await writeResults(folder, { ranked, companions, unused }, window, options, ports);
  const comparison =
    historyPath === undefined
      ? undefined
      : compareWithHistory(ranked, history.past, window, { ...prepared, companions });
  if (comparison !== undefined) await writeChangesCsv(folder.stream('changes.csv'), comparison.changes);
  timings.end('writing');

  const facts = {
    command: 'screen',
    options: asked.options,
    inputs,
    elementAges: {
      fleet: options.allOnAll ? null : agesOf(read.inputs.fleet, startMs),
      catalog: agesOf(read.inputs.catalog, startMs),
    },
    sigmaSource: options.sigmaPath ?? 'built-in table',
    counts: {
      primaries: primaries.length,
      others: others.length,
      othersWithinReach: objects.length - primaries.length,
      failedInWindow: outcome.lastMsOf.size,
      encounters: ranked.count,
      pairsRefined: outcome.pairsRefined,
      companionPairs: companions.length,
      messages,
    },
    comparedWith: previous ?? null,
    settingsChanged: changed ?? null,
  };
  const { files, alertReached } = publishRun(
    folder,
    { options, alertPc: options.alertPc, window, search, facts, caution: CAUTION, startedMs, timings },
    ports,
  );
  if (historyPath !== undefined && comparison !== undefined) {
    const run = { folder: options.outPath, files };
    await keepInHistory(historyPath, startMs, run, comparison.known, options.keepRuns, ports);
  }
  ports.log.info(finishedText(options.outPath, ranked, alertReached));
  const lines = [
    ...alertLines(ranked, options.alertPc),
    ...(comparison === undefined
      ? []
      : [
          ...changeLines(comparison.changes, RISEN_SHOWN, previous),
          ...(previous === undefined ? [] : changedSettingsLines(changed)),
          '',
        ]),
    formatConjunctionTable(ranked, options.top),
    '',
    ...companionLines(companions),
    screenedLine(options, window.endMs, primaries.length, others.length),
    '',
    formatFileCounts(read.inputs.files),
    ...failedLines(outcome.lastMsOf.size),
    ...(options.allOnAll ? [] : [formatElementAges('Fleet', agesAt(read.inputs.fleet, startMs)).trimEnd()]),
    formatElementAges('Catalog', agesAt(read.inputs.catalog, startMs)),
    resultsLine(options.outPath, files),
    formatCaution().trimEnd(),
  ];
  return { lines: lines.map((line) => line.replace(/\n$/, '')), alertReached };
}

/** Everything that is read, with the warnings that it deserves. */
async function readScreened(options: ScreenOptions, ports: JobPorts) {
  const { startMs, maxAgeDays, allOnAll } = options;
  const inputs = await readElementInputs(options.fleetPaths, options.catalogPaths, startMs);
  const { knowledge, files: otherFiles } = await readKnowledge(options.objectsPath, options.sigmaPath);
  if (!allOnAll) expectCurrentFleet(inputs.fleet, startMs, maxAgeDays);
  const groups = { fleet: allOnAll ? [] : inputs.fleet, catalog: inputs.catalog };
  warnOfOldElements(groups, startMs, maxAgeDays, ports);
  if (!allOnAll) warnOfRejected(inputs.unused, options.fleetPaths, inputs.fleet, ports);
  return { inputs, knowledge, otherFiles };
}

/** Who is screened against whom, with companions set apart. */
function prepareSearch(
  { inputs, knowledge }: Awaited<ReturnType<typeof readScreened>>,
  options: ScreenOptions,
  { startMs, endMs }: Window,
  ports: JobPorts,
) {
  const { allOnAll, volume, maxAgeDays } = options;
  const primaries = screenedObjects(allOnAll ? inputs.catalog : inputs.fleet, knowledge);
  const others = screenedObjects(allOnAll ? [] : inputs.catalog, knowledge);
  warnOfUnlisted(knowledge.listed, options.objectsPath, [...primaries, ...others], ports);
  const missKm = enclosingRadiusKm(volume);
  const objects = [...primaries, ...withinReach(others, primaries, missKm, startMs, endMs)];
  const primaryCount = primaries.length;
  const withinPrimaries = allOnAll || options.withinFleet;
  if (!withinPrimaries && others.length === 0) {
    ports.log.warn(
      'every object of the catalog is one of the fleet, so there is nothing to screen it against: give another --catalog, or --within-fleet for the fleet against itself',
    );
  }
  const whole = searchPlanOf(objects, primaryCount, {
    startMs,
    endMs,
    withinPrimaries,
    skippedPairs: [],
    volume,
    maxAgeDays,
  });
  const companions = findCompanions(whole.objects, rulesOfPlan(whole));
  const skippedPairs = companions.map(({ first, second }) => pairKey(first, second, objects.length));
  const plan = { ...whole, skippedPairs };
  return { primaries, others, objects, withinPrimaries, companions, plan };
}
