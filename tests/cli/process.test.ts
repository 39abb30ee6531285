import { spawn } from 'node:child_process';
import { once } from 'node:events';
import { readFileSync } from 'node:fs';
import { expect, test } from 'vitest';
import { COMMAND } from './real-command.js';

const PROGRAM = `"${process.execPath}" "${COMMAND}"`;
const { version } = JSON.parse(readFileSync('package.json', 'utf8'));

/** Runs a line of bash, so that pipes are those of a shell. */
async function bash(line: string): Promise<{ status: number; stdout: string; stderr: string }> {
  const child = spawn('bash', ['-c', line], { stdio: ['ignore', 'pipe', 'pipe'] });
  const output = { stdout: '', stderr: '' };
  child.stdout.on('data', (text) => (output.stdout += text));
  child.stderr.on('data', (text) => (output.stderr += text));
  const [status] = await once(child, 'close');
  return { status, ...output };
}

test('the version is that of the package', async () => {
  expect(await bash(`${PROGRAM} --version`)).toEqual({ status: 0, stdout: `${version}\n`, stderr: '' });
});

test('a mistake in the options ends with 2, told on standard error', async () => {
  expect(await bash(`${PROGRAM} screen --mis-km 5`)).toEqual({
    status: 2,
    stdout: '',
    stderr: expect.stringMatching(/^\[\S+Z\] ERROR: unknown option --mis-km: did you mean --miss-km\?\n$/),
  });
});

test('a reader that closes the pipe early is no failure', async () => {
  expect(await bash(`${PROGRAM} screen --help | true; echo "\${PIPESTATUS[0]}"`)).toEqual({
    status: 0,
    stdout: '0\n',
    stderr: '',
  });
});

test('neither is one of standard error', async () => {
  const { stdout } = await bash(
    `{ ${PROGRAM} screen --mis-km 5 2>&1 >&3 | true; echo "\${PIPESTATUS[0]}"; } 3>&1`,
  );
  expect(stdout).toBe('2\n');
});
