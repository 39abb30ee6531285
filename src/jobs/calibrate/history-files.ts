import { stat } from 'node:fs/promises';
import { isAbsolute, normalize, resolve, sep } from 'node:path';
import { glob } from 'tinyglobby';
import { InputError } from '../../input-error.js';

/**
 * The files that paths and glob patterns stand for, each once, ordered by their absolute path: the order in
 * which they were named plays no part in anything that follows. A path that exists is taken as it is, even
 * if it holds characters of a pattern. `-` (standard input) is passed on.
 *
 * @throws InputError for a pattern without a match, a path that does not exist and a folder
 */
export async function historyFiles(patterns: readonly string[]): Promise<string[]> {
  const byLocation = new Map<string, string>();
  for (const pattern of patterns) {
    for (const path of await matches(pattern)) {
      const shown = path === '-' ? path : normalize(path);
      const location = path === '-' ? path : resolve(path);
      const before = byLocation.get(location);
      if (before === undefined || shown < before) byLocation.set(location, shown);
    }
  }
  return [...byLocation].sort(([a], [b]) => (a < b ? -1 : 1)).map(([, shown]) => shown);
}

async function matches(pattern: string): Promise<string[]> {
  if (pattern === '-') return [pattern];
  const found = await stat(pattern).catch(() => undefined);
  if (found?.isDirectory()) {
    throw new InputError(
      `--history ${pattern} is a folder: name its files, for instance '${pattern.replace(/\/$/, '')}/*.tle'`,
    );
  }
  if (found !== undefined) return [pattern];
  const paths = await glob(sep === '/' ? pattern : pattern.replaceAll(sep, '/'), {
    absolute: isAbsolute(pattern),
    expandDirectories: false,
  });
  if (paths.length === 0) {
    throw new InputError(`--history ${pattern}: there is no such file, and none matches it as a pattern`);
  }
  return paths;
}
