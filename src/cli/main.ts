import { readFileSync } from 'node:fs';
import { listenForStop } from '../jobs/signals.js';
import { runCommandLine } from './run-command-line.js';

const { version } = JSON.parse(readFileSync(new URL('../../package.json', import.meta.url), 'utf8')) as {
  version: string;
};

// A reader that has seen enough (`| head`) closes the pipe: that is no failure of the run.
for (const stream of [process.stdout, process.stderr]) {
  stream.on('error', (error: NodeJS.ErrnoException) => {
    if (error.code !== 'EPIPE') throw error;
  });
}

process.exitCode = await runCommandLine(process.argv.slice(2), {
  stdout: process.stdout,
  stderr: process.stderr,
  environment: process.env,
  nowMs: Date.now,
  version,
  listenForStop,
});
