/** What the package offers and this project uses; it brings no types of its own. */
declare module 'fs-native-extensions' {
  /** Asks the kernel for an exclusive lock on the open file; `false` when someone else holds it. */
  export function tryLock(fd: number): boolean;
  /** Swaps two paths; on Linux and macOS in one step. */
  export function swapSync(from: string, to: string): void;
}
