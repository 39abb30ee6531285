import { EventEmitter } from 'node:events';
import { expect, test } from 'vitest';
import { listenForStop } from '../../src/jobs/signals.js';
import { silentPorts } from './silent-ports.js';

function fakeProcess() {
  const exits: unknown[] = [];
  const emitter = new EventEmitter();
  return {
    exits,
    on: (name: string, listener: (signal: 'SIGHUP' | 'SIGINT' | 'SIGTERM') => void) =>
      emitter.on(name, listener),
    off: (name: string, listener: (signal: 'SIGHUP' | 'SIGINT' | 'SIGTERM') => void) =>
      emitter.off(name, listener),
    emit: (name: string, signal: string) => emitter.emit(name, signal),
    listenerCount: (name: string) => emitter.listenerCount(name),
    exit: (status: unknown) => exits.push(status) as never,
  };
}

test.each([
  ['SIGHUP', 129],
  ['SIGINT', 130],
  ['SIGTERM', 143],
] as const)('%s undoes what is registered, the latest first, and ends with %i', (signal, status) => {
  const running = fakeProcess();
  const { log, messages } = silentPorts();
  const { onStop } = listenForStop(log, running);
  const undone: string[] = [];
  onStop(() => undone.push('first'));
  const forget = onStop(() => undone.push('finished before'));
  onStop(() => {
    undone.push('second');
    throw new Error('cannot');
  });
  forget();
  running.emit(signal, signal);
  expect(undone).toEqual(['second', 'first']);
  expect(running.exits).toEqual([status]);
  expect(messages).toEqual([`stopped by ${signal}: nothing of this run is kept`, 'while stopping: cannot']);
});

test('a second signal does not disturb the undoing', () => {
  const running = fakeProcess();
  const { onStop } = listenForStop(silentPorts().log, running);
  const undone: string[] = [];
  onStop(() => {
    undone.push('begun');
    running.emit('SIGINT', 'SIGINT');
    undone.push('done');
  });
  running.emit('SIGTERM', 'SIGTERM');
  expect(undone).toEqual(['begun', 'done']);
  expect(running.exits).toEqual([143]);
});

test('after close, signals are left to others', () => {
  const running = fakeProcess();
  const { close } = listenForStop(silentPorts().log, running);
  close();
  for (const signal of ['SIGHUP', 'SIGINT', 'SIGTERM']) expect(running.listenerCount(signal)).toBe(0);
});
