import { runCommandLine } from '../../src/cli/run-command-line.js';

/** Runs a command line in this process and keeps what it printed. */
export async function runInMemory(
  ...args: string[]
): Promise<{ status: number; stdout: string; stderr: string }> {
  let stdout = '';
  let stderr = '';
  const status = await runCommandLine(args, {
    stdout: { write: (text) => (stdout += text) },
    stderr: { write: (text) => (stderr += text) },
    environment: {},
    nowMs: () => Date.UTC(2026, 11, 1, 6, 30, 59),
    version: '1.2.3',
    listenForStop: () => ({ onStop: () => () => {}, close: () => {} }),
  });
  return { status, stdout, stderr };
}
