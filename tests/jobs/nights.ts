import { createHash } from 'node:crypto';
import { readdirSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import type { OutputFolder } from '../../src/jobs/output-folder.js';

/** Writes a run whose every file carries the name of the night. */
export function writeNight(output: OutputFolder, night: string): void {
  output.write('conjunctions.csv', [`night\n`, `${night}\n`]);
  output.write('unused-elements.csv', night);
  output.write(`cdm/${night}.kvn`, night);
  output.seal((files) => JSON.stringify({ program: 'wideberth', night, files }));
}

/**
 * Tells which night a folder holds, and fails unless it holds the whole of it and nothing else but
 * `foreign`; `undefined` when there is no folder.
 */
export function nightIn(folder: string, foreign: readonly string[] = []): string | undefined {
  let names: string[];
  try {
    names = (readdirSync(folder, { recursive: true }) as string[]).sort();
  } catch {
    return undefined;
  }
  const { night, files } = JSON.parse(readFileSync(join(folder, 'run.json'), 'utf8'));
  const expected = ['cdm', `cdm/${night}.kvn`, 'conjunctions.csv', 'run.json', 'unused-elements.csv'];
  const rest = names.filter((name) => !foreign.includes(name));
  if (JSON.stringify(rest) !== JSON.stringify(expected)) throw new Error(`mixed run: ${names}`);
  for (const { name, sha256, bytes } of files) {
    const content = readFileSync(join(folder, name));
    if (createHash('sha256').update(content).digest('hex') !== sha256 || content.length !== bytes) {
      throw new Error(`${name} is not of ${night}`);
    }
    if (!content.toString().includes(night)) throw new Error(`${name} is not of ${night}`);
  }
  return night;
}
