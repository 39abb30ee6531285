import { expectCurrentFleet, summarizeAges } from '../elements/age.js';
import type { ElementSet, UnusedElements } from '../elements/element-set.js';
import { formatUtc } from '../elements/utc.js';
import { type Companions, findCompanions } from '../encounters/companions.js';
import { pairKey, searchObjectsOf } from '../encounters/search-problem.js';
import { radiusBand, sieve } from '../encounters/sieve.js';
import { enclosingRadiusKm } from '../encounters/volume.js';
import { SLAB_S } from '../ephemeris/node-spacing.js';
import { writeChangesCsv } from '../tables/changes-csv.js';
import { type CompanionPair, writeCompanionsCsv } from '../tables/companions-csv.js';
import type { Conjunction } from '../tables/conjunction.js';
import { conjunctionMessageFileName, formatConjunctionMessage } from '../tables/conjunction-message.js';
import { writeConjunctionsCsv } from '../tables/conjunctions-csv.js';
import { writeSensitivityCsv } from '../tables/sensitivity-csv.js';
import {
  formatCaution,
  formatConjunctionTable,
  formatElementAges,
  formatFileCounts,
} from '../tables/terminal-table.js';
import { writeUnusedElementsCsv } from '../tables/unused-elements-csv.js';
import { changeLines, compareWithPast, type SeenEncounter } from './changes.js';
import { conjunctionOf, fillPairProbabilities, rankRecords, sensitivityOf } from './conjunctions.js';
import { type EncounterRecords, FIELD, FIELDS } from './encounter-records.js';
import { keepInHistory, prepareHistory, readPastRuns } from './history.js';
import { type ElementInputs, readElementInputs, readKnowledge } from './inputs.js';
import { type OutputFolder, openOutputFolder } from './output-folder.js';
import { RUN_RECORD } from './run-folder.js';
import { elementAgesOf, environmentOf, recordedOptions, runRecordText } from './run-record.js';
import type { JobPorts, ScreenOptions, ScreenOutcome } from './screen-options.js';
import { type ScreenedObject, screenedObject } from './screened-object.js';
import { type SearchOutcome, searchInWorkers } from './search-in-workers.js';
import { searchPlanOf } from './search-plan.js';

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
  warnOfAges(inputs, options, ports);
  timings.end('reading');

  const primaries = (options.allOnAll ? inputs.catalog : inputs.fleet).map((set) =>
    screenedObject(set, knowledge),
  );
  const others = (options.allOnAll ? [] : inputs.catalog).map((set) => screenedObject(set, knowledge));
  warnOfUnlisted(knowledge.listed, primaries, others, options, ports);
  const missKm = enclosingRadiusKm(options.volume);
  const objects = [...primaries, ...withinReach(others, primaries, missKm, options.startMs, endMs)];
  const withinPrimaries = options.allOnAll || options.withinFleet;
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
  const order = rankRecords(records, objects);
  const ranked = {
    count: order.length,
    at: (index: number): Conjunction => conjunctionOf(records, order[index], objects),
  };
  const unused = [...inputs.unused, ...failedSets(outcome, objects, endMs)];
  await writeConjunctionsCsv(folder.stream('conjunctions.csv'), sequence(ranked.count, ranked.at));
  await writeSensitivityCsv(
    folder.stream('sensitivity.csv'),
    sequence(ranked.count, (index) => sensitivityOf(records, order[index], index + 1, objects)),
  );
  await writeUnusedElementsCsv(folder.stream('unused-elements.csv'), unused);
  await writeCompanionsCsv(
    folder.stream('companions.csv'),
    companions.map((pair) => companionPair(pair, objects)),
  );
  const messages = writeMessages(folder, ranked, options, endMs, ports);

  const comparison =
    options.historyPath === undefined
      ? undefined
      : compareWithPast(seenEncounters(records, order, objects), past, {
          startMs: options.startMs,
          endMs,
          isScreened: screenedTest(primaries, others, withinPrimaries),
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
        search: {
          missKm,
          slabS: SLAB_S,
          slabs: outcome.slabs,
          shortestStepS: outcome.shortestStepS,
          longestStepS: outcome.longestStepS,
          worstInterpolationKm: outcome.worstDefectKm,
        },
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
  const lines = [
    ...(comparison === undefined ? [] : [...changeLines(comparison.changes, RISEN_SHOWN, past[0]?.name), '']),
    formatConjunctionTable(ranked, options.top),
    ...companionLines(companions.length),
    formatFileCounts(inputs.files),
    ...failedLines(outcome.lastMsOf.size),
    ...(options.allOnAll
      ? []
      : [formatElementAges('Fleet', agesAt(inputs.fleet, options.startMs)).trimEnd()]),
    formatElementAges('Catalog', agesAt(inputs.catalog, options.startMs)),
    `Results in ${options.outPath}: conjunctions.csv, sensitivity.csv, companions.csv, unused-elements.csv, run.json`,
    formatCaution().trimEnd(),
  ];
  return { lines: lines.map((line) => line.replace(/\n$/, '')), alertReached };
}

function createTimings() {
  const seconds: Record<string, number> = {};
  let before = performance.now();
  return {
    seconds,
    end: (stage: string) => {
      const now = performance.now();
      seconds[stage] = Math.round(now - before) / 1000;
      before = now;
    },
  };
}

function* sequence<T>(count: number, at: (index: number) => T): Generator<T> {
  for (let index = 0; index < count; index++) yield at(index);
}

/** Objects whose height bands come near that of any primary. */
function withinReach(
  others: readonly ScreenedObject[],
  primaries: readonly ScreenedObject[],
  missKm: number,
  startMs: number,
  endMs: number,
): ScreenedObject[] {
  if (others.length === 0) return [];
  const band = ({ record, set }: ScreenedObject) => radiusBand(record, set.epochMs, startMs, endMs);
  const passes = sieve(others.map(band), primaries.map(band), missKm);
  return others.filter((_, i) => passes[i] === 1);
}

function warnOfAges(
  { fleet, catalog }: ElementInputs,
  options: ScreenOptions,
  ports: Pick<JobPorts, 'log'>,
): void {
  const { startMs, maxAgeDays } = options;
  if (!options.allOnAll) expectCurrentFleet(fleet, startMs, maxAgeDays);
  for (const [group, sets] of [
    ['fleet', options.allOnAll ? [] : fleet],
    ['catalog', catalog],
  ] as const) {
    const ages = summarizeAges(sets, startMs, maxAgeDays);
    if (ages === undefined || ages.beyondLimit === 0) continue;
    ports.log.warn(
      `${ages.beyondLimit} of ${ages.count} ${group} element sets are further than ${maxAgeDays} days from the start; the worst is ${ages.worst.designator} with ${ages.worstDays.toFixed(1)} days. They are screened, and their rows say old-elements: get fresher sets`,
    );
  }
}

/** A radius given for an object that is not there is most likely a slip of the pen. */
function warnOfUnlisted(
  listed: ReadonlyMap<string, { readonly line: number }> | undefined,
  primaries: readonly ScreenedObject[],
  others: readonly ScreenedObject[],
  options: ScreenOptions,
  ports: Pick<JobPorts, 'log'>,
): void {
  if (listed === undefined) return;
  const present = new Set([...primaries, ...others].map(({ designator }) => designator));
  const missing = [...listed].filter(([designator]) => !present.has(designator));
  if (missing.length === 0) return;
  const [designator, { line }] = missing[0];
  const more = missing.length === 1 ? '' : ` and ${missing.length - 1} more`;
  ports.log.warn(
    `${options.objectsPath}:${line}: ${designator}${more} in no element-set file: check the designator`,
  );
}

function failedSets(
  outcome: SearchOutcome,
  objects: readonly ScreenedObject[],
  endMs: number,
): UnusedElements[] {
  return [...outcome.lastMsOf]
    .sort(([a], [b]) => a - b)
    .map(([index, lastMs]) => {
      const { set, designator } = objects[index];
      return {
        source: set.source,
        designator,
        reason: 'failed',
        detail: `SGP4 gives no state after ${formatUtc(lastMs)} (decayed, or elements too old): screened up to there, not to ${formatUtc(endMs)}`,
        failedAtMs: lastMs,
      };
    });
}

function companionPair(pair: Companions, objects: readonly ScreenedObject[]): CompanionPair {
  const side = (index: number) => ({ designator: objects[index].designator, name: objects[index].name });
  return {
    object1: side(pair.first),
    object2: side(pair.second),
    closestMs: pair.closestMs,
    closestDistanceM: 1000 * pair.closestKm,
    farthestDistanceM: 1000 * pair.farthestKm,
    fastestMPerS: 1000 * pair.fastestKmPerS,
    slowestMPerS: 1000 * pair.slowestKmPerS,
    remarks: [],
  };
}

/** @returns number of conjunction messages */
function writeMessages(
  folder: OutputFolder,
  ranked: { readonly count: number; readonly at: (index: number) => Conjunction },
  options: ScreenOptions,
  endMs: number,
  ports: Pick<JobPorts, 'nowMs'>,
): number {
  if (options.cdmFromPc === undefined) return 0;
  const run = {
    originator: 'WIDEBERTH',
    creationMs: ports.nowMs(),
    screenStartMs: options.startMs,
    screenStopMs: endMs,
    volume: options.volume,
  };
  let written = 0;
  for (; written < ranked.count; written++) {
    const conjunction = ranked.at(written);
    if (!((conjunction.collisionProbability ?? -1) >= options.cdmFromPc)) break;
    folder.write(
      `cdm/${conjunctionMessageFileName(conjunction)}`,
      formatConjunctionMessage(conjunction, run),
    );
  }
  return written;
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

/** Whether two objects were screened against each other tonight. */
function screenedTest(
  primaries: readonly ScreenedObject[],
  others: readonly ScreenedObject[],
  withinPrimaries: boolean,
): (designatorA: string, designatorB: string) => boolean {
  const own = new Set(primaries.map(({ designator }) => designator));
  const rest = new Set(others.map(({ designator }) => designator));
  return (a, b) =>
    (own.has(a) && rest.has(b)) ||
    (own.has(b) && rest.has(a)) ||
    (withinPrimaries && own.has(a) && own.has(b));
}

function agesAt(sets: readonly ElementSet[], startMs: number) {
  return sets.map(({ designator, epochMs }) => ({ designator, ageDays: (startMs - epochMs) / MS_PER_DAY }));
}

function agesOf(sets: readonly ElementSet[], startMs: number) {
  return elementAgesOf(agesAt(sets, startMs));
}

function companionLines(count: number): string[] {
  if (count === 0) return [];
  const pairs = count === 1 ? '1 pair flies' : `${count} pairs fly`;
  return [`${pairs} together for the whole window: see companions.csv`, ''];
}

function failedLines(count: number): string[] {
  if (count === 0) return [];
  return [`${count} of the used sets failed in the window (decayed): see unused-elements.csv`];
}
