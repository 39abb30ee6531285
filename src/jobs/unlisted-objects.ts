import type { ListedObject } from '../uncertainty/objects.js';
import type { JobPorts } from './screen-options.js';
import type { ScreenedObject } from './screened-object.js';

/**
 * Says in the log which rows of the objects file fit no object: a radius given for an object that is not
 * there is most likely a slip of the pen.
 *
 * @param file the objects file as the user named it
 */
export function warnOfUnlisted(
  listed: ReadonlyMap<string, ListedObject> | undefined,
  file: string | undefined,
  objects: readonly ScreenedObject[],
  ports: Pick<JobPorts, 'log'>,
): void {
  if (listed === undefined) return;
  const present = new Set(objects.map(({ designator }) => designator));
  const missing = [...listed].filter(([designator]) => !present.has(designator));
  if (missing.length === 0) return;
  const [designator, { line }] = missing[0];
  const who = missing.length === 1 ? `${designator} is` : `${designator} and ${missing.length - 1} more are`;
  ports.log.warn(`${file}:${line}: ${who} in no element-set file: check the designator`);
}
