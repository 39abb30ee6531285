import type { JobPorts } from '../../src/jobs/screen-options.js';

/** Ports of a job that keep what was logged, and what would be undone on a signal. */
export function silentPorts(
  nowMs = Date.UTC(2026, 11, 1, 2),
): JobPorts & { messages: string[]; undos: Set<() => void> } {
  const messages: string[] = [];
  const undos = new Set<() => void>();
  const note = (message: string) => messages.push(message);
  return {
    log: { info: note, warn: note, error: note },
    progress: () => {},
    onStop: (undo) => {
      undos.add(undo);
      return () => undos.delete(undo);
    },
    nowMs: () => nowMs,
    version: '0.0.0',
    messages,
    undos,
  };
}
