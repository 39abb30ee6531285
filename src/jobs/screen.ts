import { expectCurrentFleet } from '../elements/age.js';
import { formatUtc } from '../elements/utc.js';
import { findCompanions } from '../encounters/companions.js';
import { pairKey, searchObjectsOf } from '../encounters/search-problem.js';
import { enclosingRadiusKm } from '../encounters/volume.js';
import { writeChangesCsv } from '../tables/changes-csv.js';
import { type CompanionPair, writeCompanionsCsv } from '../tables/companions-csv.js';
import {
  formatCaution,
  formatConjunctionTable,
  formatElementAges,
  formatFileCounts,
} from '../tables/terminal-table.js';
import { writeUnusedElementsCsv } from '../tables/unused-elements-csv.js';
import { changeLines, compareWithPast, type SeenEncounter } from './changes.js';
import { companionRow } from './companion-row.js';
import { agesAt, agesOf, warnOfOldElements } from './element-ages.js';
import { type EncounterRecords, FIELD, FIELDS } from './encounter-records.js';
import { failedLines, failedSets, warnOfFailures } from './failed-sets.js';
import { keepInHistory, prepareHistory, readPastRuns } from './history.js';
import { readElementInputs, readKnowledge } from './inputs.js';
import { alertLines, companionLines, finishedText, resultsLine, screenedLine } from './outcome-lines.js';
import { type OutputFolder, openOutputFolder } from './output-folder.js';
import { fillPairProbabilities } from './pair-probabilities.js';
import { rankedRecords, writeRankedTables } from './ranked-records.js';
import { warnOfRejected } from './rejected-sets.js';
import { RUN_RECORD } from './run-folder.js';
import { environmentOf, recordedOptions, runRecordText } from './run-record.js';
import type { JobPorts, ScreenOptions, ScreenOutcome } from './screen-options.js';
import { type ScreenedObject, screenedObject } from './screened-object.js';
import { searchFacts } from './search-facts.js';
import { searchInWorkers } from './search-in-workers.js';
import { searchPlanOf } from './search-plan.js';
import { createTimings } from './timings.js';
import { warnOfUnlisted } from './unlisted-objects.js';
import { withinReach } from './within-reach.js';
import { writeMessages } from './write-messages.js';

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
  const folder = await openOutputFolder(options.outPath, ports);
  try {
    return await screenInto(folder, options, ports, startedMs);
  } finally {
    folder.close();
  }
}

async function screenInto(
  folder: OutputFolder,
  options: ScreenOptions,
  ports: JobPorts,
  startedMs: number,
): Promise<ScreenOutcome> {
  const timings = createTimings();
  const endMs = options.startMs + Math.round(options.days * MS_PER_DAY);
  if (options.historyPath !== undefined) await prepareHistory(options.historyPath, ports);
  const past =
    options.historyPath === undefined ? [] : readPastRuns(options.historyPath, options.startMs, ports);

  const inputs = await readElementInputs(options.fleetPaths, options.catalogPaths, options.startMs);
  const { knowledge, files: otherFiles } = await readKnowledge(options.objectsPath, options.sigmaPath);
  if (!options.allOnAll) expectCurrentFleet(inputs.fleet, options.startMs, options.maxAgeDays);
  warnOfOldElements(
    { fleet: options.allOnAll ? [] : inputs.fleet, catalog: inputs.catalog },
    options.startMs,
    options.maxAgeDays,
    ports,
  );
  if (!options.allOnAll) warnOfRejected(inputs.unused, options.fleetPaths, inputs.fleet, ports);
  timings.end('reading');

  const primaries = (options.allOnAll ? inputs.catalog : inputs.fleet).map((set) =>
    screenedObject(set, knowledge),
  );
  const others = (options.allOnAll ? [] : inputs.catalog).map((set) => screenedObject(set, knowledge));
  warnOfUnlisted(knowledge.listed, options.objectsPath, [...primaries, ...others], ports);
  const missKm = enclosingRadiusKm(options.volume);
  const objects = [...primaries, ...withinReach(others, primaries, missKm, options.startMs, endMs)];
  const withinPrimaries = options.allOnAll || options.withinFleet;
  if (!withinPrimaries && others.length === 0) {
    ports.log.warn(
      'every object of the catalog is one of the fleet, so there is nothing to screen it against: give another --catalog, or --within-fleet for the fleet against itself',
    );
  }
  const searched = searchObjectsOf(
    objects.map(({ set }) => set),
    primaries.length,
    objects.map(({ record }) => record),
  );
  const companions = findCompanions(searched, {
    startMs: options.startMs,
    endMs,
    missKm,
    withinPrimaries,
    skippedPairs: new Set(),
  });
  timings.end('preparing');

  const plan = searchPlanOf(objects, {
    primaryCount: primaries.length,
    startMs: options.startMs,
    endMs,
    withinPrimaries,
    skippedPairs: companions.map(({ first, second }) => pairKey(first, second, objects.length)),
    volume: options.volume,
    maxAgeDays: options.maxAgeDays,
  });
  ports.log.info(
    `searching ${formatUtc(options.startMs)} to ${formatUtc(endMs)}: ${primaries.length} ${options.allOnAll ? 'objects on each other' : 'of the fleet'}, ${objects.length - primaries.length} of ${others.length} others within reach`,
  );
  const outcome = await searchInWorkers(plan, options.workers, ports);
  timings.end('searching');

  const { records } = outcome;
  fillPairProbabilities(records, objects.length);
  const ranked = rankedRecords(records, objects);
  const { order } = ranked;
  const failed = failedSets(outcome, objects, options.startMs, endMs);
  warnOfFailures(failed, inputs.fleet, ports);
  const unused = [...inputs.unused, ...failed];
  await writeRankedTables(folder, ranked);
  await writeUnusedElementsCsv(folder.stream('unused-elements.csv'), unused);
  const companionRows = companions.map((pair) => companionRow(pair, objects));
  await writeCompanionsCsv(folder.stream('companions.csv'), companionRows);
  const messages = writeMessages(
    folder,
    ranked,
    options.cdmFromPc,
    { startMs: options.startMs, endMs, volume: options.volume },
    ports,
  );

  const comparison =
    options.historyPath === undefined
      ? undefined
      : compareWithPast(seenEncounters(records, order, objects), past, {
          startMs: options.startMs,
          endMs,
          isScreened: screenedTest(primaries, others, withinPrimaries, companionRows),
        });
  if (comparison !== undefined) await writeChangesCsv(folder.stream('changes.csv'), comparison.changes);
  timings.end('writing');

  const highest = order.length === 0 ? Number.NaN : records.data[FIELDS * order[0] + FIELD.probability];
  const alertReached = options.alertPc !== undefined && highest >= options.alertPc;
  const counts = {
    primaries: primaries.length,
    others: others.length,
    othersWithinReach: objects.length - primaries.length,
    failedInWindow: outcome.lastMsOf.size,
    encounters: ranked.count,
    pairsRefined: outcome.pairsRefined,
    companionPairs: companions.length,
    messages,
  };
  let runFiles: readonly string[] = [];
  folder.seal((files) => {
    runFiles = [...files.map((file) => file.name), RUN_RECORD];
    return runRecordText(
      ports.version,
      {
        command: 'screen',
        options: recordedOptions(options),
        window: { startUtc: formatUtc(options.startMs), endUtc: formatUtc(endMs), days: options.days },
        inputs: { elements: inputs.files, others: otherFiles },
        elementAges: {
          fleet: options.allOnAll ? null : agesOf(inputs.fleet, options.startMs),
          catalog: agesOf(inputs.catalog, options.startMs),
        },
        search: searchFacts(outcome, options.volume),
        sigmaSource: options.sigmaPath ?? 'built-in table',
        counts,
        alert: { highestProbability: Number.isNaN(highest) ? null : highest, reached: alertReached },
        comparedWith: past[0]?.name ?? null,
        environment: environmentOf(startedMs, ports.nowMs(), timings.seconds, options.workers),
      },
      files,
    );
  });
  folder.publish();
  if (options.historyPath !== undefined && comparison !== undefined) {
    await keepInHistory(
      options.historyPath,
      options.startMs,
      { folder: options.outPath, files: runFiles },
      comparison.known,
      options.keepRuns,
      ports,
    );
  }
  ports.log.info(finishedText(options.outPath, ranked, alertReached));
  const lines = [
    ...alertLines(ranked, options.alertPc),
    ...(comparison === undefined ? [] : [...changeLines(comparison.changes, RISEN_SHOWN, past[0]?.name), '']),
    formatConjunctionTable(ranked, options.top),
    '',
    ...companionLines(companionRows),
    screenedLine(options, endMs, primaries.length, others.length),
    '',
    formatFileCounts(inputs.files),
    ...failedLines(outcome.lastMsOf.size),
    ...(options.allOnAll
      ? []
      : [formatElementAges('Fleet', agesAt(inputs.fleet, options.startMs)).trimEnd()]),
    formatElementAges('Catalog', agesAt(inputs.catalog, options.startMs)),
    resultsLine(options.outPath, runFiles),
    formatCaution().trimEnd(),
  ];
  return { lines: lines.map((line) => line.replace(/\n$/, '')), alertReached };
}

function seenEncounters(
  { data }: EncounterRecords,
  order: Uint32Array,
  objects: readonly ScreenedObject[],
): SeenEncounter[] {
  return Array.from(order, (number) => {
    const at = FIELDS * number;
    const first = objects[data[at + FIELD.first]];
    const second = objects[data[at + FIELD.second]];
    const probability = data[at + FIELD.probability];
    return {
      object1Designator: first.designator,
      object1Name: first.name,
      object2Designator: second.designator,
      object2Name: second.name,
      tcaMs: data[at + FIELD.tcaMs],
      missDistanceM: 1000 * data[at + FIELD.missKm],
      collisionProbability: Number.isNaN(probability) ? undefined : probability,
      shorterPeriodS: Math.min(first.orbit.periodS, second.orbit.periodS),
    };
  });
}

/** Whether two objects were screened against each other tonight; companions were not. */
function screenedTest(
  primaries: readonly ScreenedObject[],
  others: readonly ScreenedObject[],
  withinPrimaries: boolean,
  companions: readonly CompanionPair[],
): (designatorA: string, designatorB: string) => boolean {
  const own = new Set(primaries.map(({ designator }) => designator));
  const rest = new Set(others.map(({ designator }) => designator));
  const together = new Set(
    companions.flatMap(({ object1: { designator: a }, object2: { designator: b } }) => [
      `${a} ${b}`,
      `${b} ${a}`,
    ]),
  );
  return (a, b) =>
    !together.has(`${a} ${b}`) &&
    ((own.has(a) && rest.has(b)) ||
      (own.has(b) && rest.has(a)) ||
      (withinPrimaries && own.has(a) && own.has(b)));
}
