import { closeSync, openSync, writeSync } from 'node:fs';

const BUFFER_BYTES = 1 << 16;

/** A new file that is written front to back, in blocks. */
export type BufferedFile = {
  readonly path: string;
  readonly write: (bytes: Uint8Array) => void;
  /** Writes what is still in memory and closes the file. */
  readonly finish: () => void;
  /** Closes the file without caring for what is in it; after `finish` it does nothing. */
  readonly abandon: () => void;
};

/**
 * Writes synchronously: millions of small records are not worth a promise each.
 *
 * @param path must not exist
 */
export function createBufferedFile(path: string, bufferBytes = BUFFER_BYTES): BufferedFile {
  let handle: number | undefined = openSync(path, 'wx');
  const buffer = new Uint8Array(bufferBytes);
  let held = 0;
  const writeOut = (bytes: Uint8Array) => {
    for (let written = 0; written < bytes.length; ) {
      written += writeSync(handle!, bytes, written, bytes.length - written);
    }
  };
  const flush = () => {
    writeOut(buffer.subarray(0, held));
    held = 0;
  };
  const close = () => {
    if (handle !== undefined) closeSync(handle);
    handle = undefined;
  };
  return {
    path,
    write: (bytes) => {
      if (held + bytes.length > bufferBytes) flush();
      if (bytes.length > bufferBytes) {
        writeOut(bytes);
        return;
      }
      buffer.set(bytes, held);
      held += bytes.length;
    },
    finish: () => {
      flush();
      close();
    },
    abandon: close,
  };
}
