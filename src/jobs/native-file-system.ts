import { createRequire } from 'node:module';
import { InputError } from '../input-error.js';

type NativeFileSystem = typeof import('fs-native-extensions');

const require = createRequire(import.meta.url);

/**
 * Two calls of the operating system that Node does not offer: a file lock that ends with its process, and
 * the swap of two folders in one step.
 *
 * Loaded only when a job needs it, so that help and messages work on a machine for which the package has
 * no build.
 *
 * @throws InputError on such a machine
 */
export function nativeFileSystem(): NativeFileSystem {
  try {
    return require('fs-native-extensions') as NativeFileSystem;
  } catch (error) {
    throw new InputError(
      `no file locks on ${process.platform}-${process.arch}: the package fs-native-extensions cannot be loaded (${(error as Error).message.split('\n')[0]})`,
    );
  }
}
