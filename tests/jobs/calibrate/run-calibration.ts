import { mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { basename, join } from 'node:path';
import type { ElementSet, UnusedElements } from '../../../src/elements/element-set.js';
import { calibrate } from '../../../src/jobs/calibrate/calibrate.js';

export type Calibration = {
  readonly folder: string;
  readonly lines: readonly string[];
  /** Contents of the results by suffix, such as `.csv` and `.report.txt`. */
  readonly results: Readonly<Record<string, string>>;
};

type FileContents = Readonly<Record<string, ReadonlyArray<ElementSet | UnusedElements>>>;

const folders: string[] = [];

/** A new empty folder, removed by `removeFolders`. */
export function newFolder(): string {
  const folder = mkdtempSync(join(tmpdir(), 'calibrate-'));
  folders.push(folder);
  return folder;
}

export function removeFolders(): void {
  for (const folder of folders.splice(0)) rmSync(folder, { recursive: true, force: true });
}

/** Calibrates on sets that stand in memory in the place of the contents of files. */
export async function runCalibration(
  contents: FileContents,
  options: { folder?: string; commonErrorFactor?: number; names?: readonly string[] } = {},
): Promise<Calibration> {
  const folder = options.folder ?? newFolder();
  for (const name of Object.keys(contents)) writeFileSync(join(folder, name), '');
  const names = options.names ?? Object.keys(contents);
  const lines = await calibrate(
    {
      historyPaths: names.map((name) => join(folder, name)),
      outPath: join(folder, 'sigma.csv'),
      commonErrorFactor: options.commonErrorFactor ?? 1,
    },
    {
      log: { info: () => {}, warn: () => {}, error: () => {} },
      progress: () => {},
      onStop: () => () => {},
    },
    async function* (path) {
      for (const item of contents[basename(path)]) {
        yield { ...item, source: { ...item.source, file: path } };
      }
    },
  );
  return { folder, lines, results: resultsIn(folder) };
}

/** What stands in a folder under the name of the table. */
export function resultsIn(folder: string): Record<string, string> {
  return Object.fromEntries(
    readdirSync(folder)
      .filter((name) => name.startsWith('sigma.'))
      .map((name) => [name.slice('sigma'.length), readFileSync(join(folder, name), 'utf8')]),
  );
}

/** The records of a CSV result by column name, `#` lines skipped; none of those looked at here holds a comma in a cell. */
export function csvRecords(text: string): Record<string, string>[] {
  const [head, ...rows] = text
    .trimEnd()
    .split('\r\n')
    .filter((line) => !line.startsWith('#'));
  const names = head.split(',');
  return rows.map((row) => {
    const cells = row.split(',');
    return Object.fromEntries(names.map((name, i) => [name, cells[i]]));
  });
}
