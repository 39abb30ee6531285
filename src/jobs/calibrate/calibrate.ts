import { writeFile } from 'node:fs/promises';
import { resolve } from 'node:path';
import { InputError } from '../../input-error.js';
import { type CsvColumn, writeCsv } from '../../tables/csv-text.js';
import { fileError } from '../file-errors.js';
import type { JobPorts } from '../screen-options.js';
import { BIN_COLUMNS, binRows } from './bins-csv.js';
import { binsOfClass } from './class-bins.js';
import { addToCoverage, emptyCoverage } from './coverage.js';
import { CLASS_DEMAND, errorGrowth, reaches } from './error-growth.js';
import { createHeldBackDifferences, readHeldBackDifferences } from './held-back-differences.js';
import { sumOfTallies } from './history-counts.js';
import { historyFiles } from './history-files.js';
import { INPUT_COLUMNS } from './inputs-csv.js';
import { MANEUVER_COLUMNS } from './maneuvers-csv.js';
import type { Standing } from './object-result.js';
import { ORBIT_CLASSES } from './orbit-classes.js';
import { OUTPUT_SUFFIXES, type OutputFiles, type OutputName, openOutputFiles } from './output-files.js';
import { createPartitions } from './partitions.js';
import { type ReadSets, readHistory } from './read-history.js';
import { type CalibrationSummary, fullReport, shortReport } from './report.js';
import { type ClassResult, SIGMA_TABLE_COLUMNS, sigmaTableHead, sigmaTableRows } from './sigma-table-csv.js';
import { type HistoryStudy, studyHistory } from './study-history.js';
import { createUnusedSets } from './unused-sets.js';

type CalibrateOptions = {
  /** Files and glob patterns, `-` for standard input. */
  readonly historyPaths: readonly string[];
  /** The table; the other results stand beside it. */
  readonly outPath: string;
  /** Multiplies every sigma of the table; 1 or more. */
  readonly commonErrorFactor: number;
};

/**
 * Measures how the errors of public element sets grow with age, from the history of the sets themselves, and
 * writes them as a table for `screen --sigma`, with a report.
 *
 * The same sets give the same bytes, however they are spread over files and in whatever order these are named
 * (names of files and numbers of lines stand in the lists of unused sets and inputs).
 *
 * Nothing grows with the number of sets but temporary files beside the table (some 170 bytes a set): memory
 * is some 150 MB, 1/128 of the sets at a time, and 3 kB an object.
 *
 * @param readSets reads one file
 * @returns what goes to standard output
 * @throws InputError for options, files and places that cannot be used, and for a history too thin for any row
 */
export async function calibrate(
  options: CalibrateOptions,
  ports: Pick<JobPorts, 'log' | 'progress' | 'onStop'>,
  readSets: ReadSets,
): Promise<string[]> {
  const files = await historyFiles(options.historyPaths);
  try {
    const output = openOutputFiles(options.outPath, ports);
    try {
      refuseToOverwriteInput(files, output);
      return await calibrateInto(output, files, options.commonErrorFactor, ports, readSets);
    } finally {
      output.close();
    }
  } catch (error) {
    throw fileError(options.outPath, error);
  }
}

async function calibrateInto(
  output: OutputFiles,
  files: readonly string[],
  commonErrorFactor: number,
  ports: Pick<JobPorts, 'log' | 'progress'>,
  readSets: ReadSets,
): Promise<string[]> {
  const partitions = createPartitions(output.staging);
  const unused = createUnusedSets(output.stagedPath('unused'));
  const heldBack = createHeldBackDifferences(`${output.staging}/held-back.bin`);
  try {
    const tallies = await readHistory(files, readSets, partitions, unused, (fraction) =>
      ports.progress({ stage: 'reading sets', fraction, detail: '' }),
    );
    partitions.finish();
    const { read, rejected } = sumOfTallies(tallies);
    ports.log.info(`read ${read} sets from ${files.length} ${files.length === 1 ? 'file' : 'files'}`);
    if (rejected > 0)
      ports.log.warn(`faulty sets left out: ${rejected}, listed in ${output.finalPath('unused')}`);

    const study = await studyHistory(output.staging, { tallies, unused, heldBack }, (fraction) =>
      ports.progress({ stage: 'comparing sets', fraction, detail: '' }),
    );
    unused.finish();
    heldBack.file.finish();
    const classes = ORBIT_CLASSES.map((orbitClass, i): ClassResult => {
      const bins = binsOfClass(study.classBins, i);
      return { orbitClass, bins, growth: errorGrowth(bins, CLASS_DEMAND) };
    });
    const summary: CalibrationSummary = {
      ...(await classCoverage(heldBack.file.path, classes, study.uncheckedHeldBack)),
      ...ofStudy(study),
      classes,
      files: files.length,
      tally: sumOfTallies(tallies),
      commonErrorFactor,
      rejectedExamples: unused.examples,
      paths: Object.fromEntries(
        Object.keys(OUTPUT_SUFFIXES).map((name) => [name, output.finalPath(name as OutputName)]),
      ) as Record<OutputName, string>,
    };

    const write = <Row>(name: OutputName, columns: readonly CsvColumn<Row>[], rows: Iterable<Row>) =>
      writeCsv(output.createStaged(name), columns, rows);
    await write('bins', BIN_COLUMNS, binRows(classes, study.objects));
    await write('maneuvers', MANEUVER_COLUMNS, study.maneuvers);
    await write('inputs', INPUT_COLUMNS, tallies);
    await writeFile(output.stagedPath('report'), fullReport(summary), { flag: 'wx' });
    const besides: readonly OutputName[] = ['report', 'bins', 'maneuvers', 'inputs', 'unused'];
    const table = output.createStaged('table');
    table.write(sigmaTableHead(commonErrorFactor));
    const rows = sigmaTableRows(classes, study.objects, commonErrorFactor);
    if ((await writeCsv(table, SIGMA_TABLE_COLUMNS, rows)) === 0) {
      output.publish(besides);
      throw new InputError(
        `the history is too thin for any row: ${output.finalPath('table')} is not written; ` +
          `${output.finalPath('report')} says what there is and what it takes`,
      );
    }
    output.publish(['table', ...besides]);
    return shortReport(summary);
  } finally {
    partitions.abandon();
    unused.abandon();
    heldBack.file.abandon();
  }
}

/** Holds the differences that waited on disk against the laws of their classes. */
async function classCoverage(
  path: string,
  classes: readonly ClassResult[],
  uncheckedBefore: number,
): Promise<Pick<CalibrationSummary, 'classCoverages' | 'othersCoverage' | 'uncheckedHeldBack'>> {
  const classCoverages = classes.map(() => emptyCoverage());
  const othersCoverage = emptyCoverage();
  let uncheckedHeldBack = uncheckedBefore;
  for await (const differences of readHeldBackDifferences(path)) {
    for (const { hasOwnRows, orbitClass, knot, ageDays, differenceRtnM } of differences) {
      const { growth } = classes[orbitClass];
      const isChecked = growth !== undefined && reaches(growth, knot);
      if (isChecked) addToCoverage(classCoverages[orbitClass], growth, knot, ageDays, differenceRtnM);
      if (hasOwnRows) continue;
      if (isChecked) addToCoverage(othersCoverage, growth, knot, ageDays, differenceRtnM);
      else uncheckedHeldBack++;
    }
  }
  return { classCoverages, othersCoverage, uncheckedHeldBack };
}

function ofStudy(study: HistoryStudy) {
  const count = (standing: Standing) => study.objects.filter((each) => each.standing === standing).length;
  return {
    objects: {
      'own rows': count('own rows'),
      'too few pairs': count('too few pairs'),
      biased: count('biased'),
    },
    biased: study.objects.filter((each) => each.standing === 'biased').map((each) => each.designator),
    maneuvers: study.maneuvers.length,
    objectsWithManeuvers: study.objectsWithManeuvers,
    pairs: study.pairs,
    ownCoverage: study.ownCoverage,
    epochsMs: study.epochsMs,
  };
}

function refuseToOverwriteInput(files: readonly string[], output: OutputFiles): void {
  const inputs = new Map(files.map((file) => [resolve(file), file]));
  for (const name of Object.keys(OUTPUT_SUFFIXES) as OutputName[]) {
    const input = inputs.get(resolve(output.finalPath(name)));
    if (input !== undefined) {
      throw new InputError(`--history ${input} would be overwritten by a result: give another --out`);
    }
  }
}
