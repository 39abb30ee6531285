import { createHash } from 'node:crypto';
import { readFile } from 'node:fs/promises';
import { countFiles } from '../elements/count-files.js';
import type { ElementSet, FileCount, UnusedElements } from '../elements/element-set.js';
import { decodeText } from '../elements/file-bytes.js';
import { readElementFiles } from '../elements/read.js';
import { selectSets } from '../elements/select.js';
import { defaultSigmaTable } from '../uncertainty/default-sigma-table.js';
import { readObjects } from '../uncertainty/objects.js';
import { readSigmaTable } from '../uncertainty/sigma-table.js';
import { fileError } from './file-errors.js';
import type { ObjectKnowledge } from './screened-object.js';

export type OtherFile = { readonly file: string; readonly sha256: string };

type ElementInputs = {
  readonly fleet: readonly ElementSet[];
  readonly catalog: readonly ElementSet[];
  /** Rejected and superseded sets, in the order of the files. */
  readonly unused: readonly UnusedElements[];
  readonly files: readonly FileCount[];
};

/**
 * Reads the element sets of fleet and catalog, chooses one set an object and accounts for every record.
 *
 * @throws InputError where a file cannot be used
 */
export async function readElementInputs(
  fleetPaths: readonly string[],
  catalogPaths: readonly string[],
  startMs: number,
): Promise<ElementInputs> {
  const fleetRead = await readElementFiles(fleetPaths);
  const catalogRead = await readElementFiles(catalogPaths);
  const selection = selectSets({ fleet: fleetRead.sets, catalog: catalogRead.sets, startMs });
  return {
    fleet: selection.fleet,
    catalog: selection.catalog,
    unused: [...fleetRead.rejected, ...catalogRead.rejected, ...selection.superseded],
    files: countFiles([...fleetRead.files, ...catalogRead.files], selection),
  };
}

/**
 * Reads what the user knows about objects.
 *
 * @throws InputError where a file cannot be read or is wrong
 */
export async function readKnowledge(
  objectsPath: string | undefined,
  sigmaPath: string | undefined,
): Promise<{ readonly knowledge: ObjectKnowledge; readonly files: readonly OtherFile[] }> {
  const files: OtherFile[] = [];
  const read = async <T>(path: string | undefined, parse: (text: string, file: string) => T) => {
    if (path === undefined) return undefined;
    const bytes = await readFile(path).catch((error: unknown) => {
      throw fileError(path, error);
    });
    files.push({ file: path, sha256: createHash('sha256').update(bytes).digest('hex') });
    return parse(decodeText(bytes, 0, bytes.length), path);
  };
  const listed = await read(objectsPath, readObjects);
  const sigmas = await read(sigmaPath, readSigmaTable);
  return { knowledge: { listed, sigmas, defaultSigmas: defaultSigmaTable() }, files };
}
