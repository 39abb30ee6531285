/** A mistake in the input or the options, told in one line; the command ends with status 2. */
export class InputError extends Error {
  override readonly name = 'InputError';
}
