/** Another run is at work on the same output; the command ends with status 4. */
export class RunLockedError extends Error {
  override readonly name = 'RunLockedError';
}
