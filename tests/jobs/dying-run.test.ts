import * as files from 'node:fs';
import { mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, test, vi } from 'vitest';
import { openOutputFolder } from '../../src/jobs/output-folder.js';
import { nightIn, writeNight } from './nights.js';
import { silentPorts } from './silent-ports.js';

/**
 * A file system that dies: the chosen call and every one after it throw, as if the process had been killed
 * there. So every moment between two calls is tried, not only those that a random kill happens to hit.
 */
const death = vi.hoisted(() => ({
  callsLeft: Number.POSITIVE_INFINITY,
  canSwap: true,
  openFiles: new Set<number>(),
}));

class Killed extends Error {}

vi.mock('node:fs', async (importOriginal) => {
  const original = await importOriginal<typeof import('node:fs')>();
  const count =
    (name: string, call: (...args: unknown[]) => unknown) =>
    (...args: unknown[]) => {
      if (death.callsLeft-- <= 0) throw new Killed(name);
      const result = call(...args);
      if (name === 'openSync') death.openFiles.add(result as number);
      if (name === 'closeSync') death.openFiles.delete(args[0] as number);
      return result;
    };
  return Object.fromEntries(
    Object.entries(original).map(([name, value]) => [
      name,
      // Flushing is counted but not done: it only matters when the machine dies, and takes most of the time.
      name.endsWith('Sync') && typeof value === 'function'
        ? count(name, name === 'fsyncSync' ? () => {} : (value as never))
        : value,
    ]),
  );
});

vi.mock('../../src/jobs/native-file-system.js', async (importOriginal) => {
  const { nativeFileSystem } = await importOriginal<typeof import('../../src/jobs/native-file-system.js')>();
  const { tryLock, swapSync } = nativeFileSystem();
  return {
    nativeFileSystem: () => ({
      tryLock,
      swapSync: (from: string, to: string) => {
        if (death.callsLeft-- <= 0) throw new Killed('swapSync');
        if (!death.canSwap) throw Object.assign(new Error('invalid argument'), { code: 'EINVAL' });
        swapSync(from, to);
      },
    }),
  };
});

let folder = '';
let out = '';
beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), 'wideberth-death-'));
  out = join(folder, 'tonight');
});
afterEach(() => {
  death.callsLeft = Number.POSITIVE_INFINITY;
  death.canSwap = true;
  rmSync(folder, { recursive: true });
});

async function publishNight(night: string): Promise<void> {
  const output = await openOutputFolder(out, silentPorts());
  writeNight(output, night);
  output.publish();
  output.close();
}

/** Runs a night that dies at its call number `call`; `false` when it got through before. */
async function diesAt(call: number, night: string): Promise<boolean> {
  death.openFiles.clear();
  death.callsLeft = call;
  let died = false;
  try {
    await publishNight(night);
  } catch (error) {
    if (!(error instanceof Killed)) throw error;
    died = true;
  }
  death.callsLeft = Number.POSITIVE_INFINITY;
  // The kernel closes the files of a dead process, and so ends its lock.
  for (const fd of death.openFiles) files.closeSync(fd);
  return died;
}

describe.each([true, false])('a run that dies at any call, on a file system that can swap: %s', (canSwap) => {
  test('leaves the whole night before or the whole new night, and the next run works', async () => {
    death.canSwap = canSwap;
    const found = new Map<string, number>();
    let call = 0;
    for (let died = true; died; call++) {
      rmSync(folder, { recursive: true });
      files.mkdirSync(folder);
      await publishNight('first');
      writeFileSync(join(out, 'notes.txt'), 'keep me');

      died = await diesAt(call, 'second');
      const night = nightIn(out, ['notes.txt']) ?? 'none';
      found.set(night, (found.get(night) ?? 0) + 1);

      await publishNight('third');
      expect(nightIn(out, ['notes.txt'])).toBe('third');
      expect(readFileSync(join(out, 'notes.txt'), 'utf8')).toBe('keep me');
      expect(readdirSync(folder)).toEqual(['tonight']);
    }
    expect(call).toBeGreaterThan(30);
    expect(found.get('first')).toBeGreaterThan(10);
    expect(found.get('second')).toBeGreaterThan(5);
    // Without a swap there is one moment, between two renames, at which nothing is there.
    expect(found.get('none') ?? 0).toBe(canSwap ? 0 : 1);
  });

  test('leaves nothing or the whole run on the very first night', async () => {
    death.canSwap = canSwap;
    const found = new Set<string | undefined>();
    let call = 0;
    for (let died = true; died; call++) {
      rmSync(folder, { recursive: true });
      files.mkdirSync(folder);
      died = await diesAt(call, 'first');
      found.add(nightIn(out));
      await publishNight('second');
      expect(nightIn(out)).toBe('second');
      expect(readdirSync(folder)).toEqual(['tonight']);
    }
    expect(found).toEqual(new Set([undefined, 'first']));
  });

  test('may die again while it recovers', async () => {
    death.canSwap = canSwap;
    let seed = 20261201;
    const random = (below: number) => {
      seed = (seed * 1_103_515_245 + 12_345) % 2_147_483_648;
      return Math.floor((seed / 2_147_483_648) * below);
    };
    await publishNight('first');
    writeFileSync(join(out, 'notes.txt'), 'keep me');
    for (let round = 0; round < 20; round++) {
      for (let again = 0; again < 4; again++) {
        await diesAt(random(70), `night-${round}-${again}`);
        const night = nightIn(out, ['notes.txt']);
        if (canSwap) expect(night).toBeDefined();
      }
      await publishNight(`whole-${round}`);
      expect(nightIn(out, ['notes.txt'])).toBe(`whole-${round}`);
      expect(readFileSync(join(out, 'notes.txt'), 'utf8')).toBe('keep me');
      expect(readdirSync(folder)).toEqual(['tonight']);
    }
  });
});
