import type { ElementSet, UnusedElements } from '../elements/element-set.js';
import { inputLabel } from '../elements/file-bytes.js';
import type { JobPorts } from './screen-options.js';

/**
 * Says in the log which sets of the fleet were rejected with no other set for their satellite: nobody looks
 * after it, and a list alone must not be the one to say so.
 *
 * @param fleet the sets of the fleet that are used
 */
export function warnOfRejected(
  unused: readonly UnusedElements[],
  fleetPaths: readonly string[],
  fleet: readonly ElementSet[],
  ports: Pick<JobPorts, 'log'>,
): void {
  const screened = new Set(fleet.map(({ designator }) => designator));
  const lost = unused.filter(
    ({ reason, source, designator }) =>
      reason === 'rejected' &&
      fleetPaths.includes(source.file) &&
      (designator === '' || !screened.has(designator)),
  );
  if (lost.length === 0) return;
  const [{ source, designator, detail }] = lost;
  const who = designator === '' ? 'a set' : designator;
  const more = lost.length === 1 ? '' : `; and ${lost.length - 1} more, see unused-elements.csv`;
  ports.log.warn(
    `${inputLabel(source.file)}:${source.line}: ${who} of the fleet is rejected and so not screened: ${detail}${more}`,
  );
}
