import type { JobPorts, ScreenOptions, ScreenOutcome } from './screen-options.js';

/** Screens a fleet against a catalog. */
export async function screen(_options: ScreenOptions, _ports: JobPorts): Promise<ScreenOutcome> {
  throw new Error('screening is not part of this build yet');
}
