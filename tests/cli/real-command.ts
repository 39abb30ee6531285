import { type ChildProcess, spawn } from 'node:child_process';
import { createHash } from 'node:crypto';
import { once } from 'node:events';
import { mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join, relative } from 'node:path';
import { pathToFileURL } from 'node:url';
import { strictCsv } from '../tables/strict-csv.js';

/** The command as a user starts it, on the compiled build. */
export const COMMAND = join(import.meta.dirname, '../../bin/wideberth.js');

/** The folder of the sample catalogs. */
export const SAMPLES = join(import.meta.dirname, '../../sample-catalogs');

/** For runs that have nothing to do with threads: each has to be started, and the tests fill all cores anyway. */
export const ONE_WORKER = ['--workers', '1'] as const;

export type Outcome = {
  /** `null` when a signal ended the process. */
  readonly status: number | null;
  readonly stdout: string;
  readonly stderr: string;
};

export type Circumstances = {
  /** Text or bytes for standard input; without it, standard input is empty. */
  readonly input?: string | Uint8Array;
  readonly cwd?: string;
  readonly environment?: Readonly<Record<string, string>>;
};

/** Starts the command and does not wait for it. */
export function startCommand(args: readonly string[], circumstances: Circumstances = {}): ChildProcess {
  // Nothing of the terminal or of the settings in which the tests run reaches the command.
  const { NO_COLOR: _, FORCE_COLOR: __, NODE_OPTIONS: ___, ...inherited } = process.env;
  const child = spawn(process.execPath, [COMMAND, ...args], {
    stdio: ['pipe', 'pipe', 'pipe'],
    cwd: circumstances.cwd,
    env: { ...inherited, ...circumstances.environment },
  });
  // A command that does not read its input closes it.
  child.stdin.on('error', () => {});
  child.stdin.end(circumstances.input);
  return child;
}

/** Waits for the end of a started command and tells what it printed from now on. */
export async function outcomeOf(child: ChildProcess): Promise<Outcome> {
  let stdout = '';
  let stderr = '';
  child.stdout?.setEncoding('utf8').on('data', (text: string) => {
    stdout += text;
  });
  child.stderr?.setEncoding('utf8').on('data', (text: string) => {
    stderr += text;
  });
  const [status] = (await once(child, 'close')) as [number | null];
  return { status, stdout, stderr };
}

/** Runs the command to its end. */
export function runCommand(args: readonly string[], circumstances?: Circumstances): Promise<Outcome> {
  return outcomeOf(startCommand(args, circumstances));
}

/** A fresh folder; `remove` takes it away with all in it. */
export function freshFolder(): { readonly path: string; readonly remove: () => void } {
  const path = mkdtempSync(join(tmpdir(), 'wideberth-command-'));
  return { path, remove: () => rmSync(path, { recursive: true, force: true }) };
}

export type Row = Readonly<Record<string, string>>;

/** The rows of a CSV file of strict RFC 4180 by the names in its header. */
export function rowsOf(path: string): Row[] {
  const text = new TextDecoder('utf-8', { fatal: true, ignoreBOM: true }).decode(readFileSync(path));
  const [header, ...records] = strictCsv(text);
  return records.map((cells) => Object.fromEntries(cells.map((cell, i) => [header[i], cell])));
}

// biome-ignore lint/suspicious/noExplicitAny: tests look into the record as its readers do, by name.
export type ParsedRecord = any;

export function runRecordOf(folder: string): ParsedRecord {
  return JSON.parse(readFileSync(join(folder, 'run.json'), 'utf8'));
}

/** Every file in a folder with its bytes as text, `run.json` without what belongs to the machine and the moment. */
export function contentsOf(folder: string): Record<string, string> {
  const names = (readdirSync(folder, { recursive: true, withFileTypes: true }) ?? [])
    .filter((entry) => entry.isFile())
    .map((entry) => relative(folder, join(entry.parentPath, entry.name)))
    .sort();
  return Object.fromEntries(
    names.map((name) => {
      const text = readFileSync(join(folder, name), 'utf8');
      return [name, name === 'run.json' ? text.slice(0, text.indexOf('"environment"')) : text];
    }),
  );
}

/**
 * Fails unless a folder holds exactly the files that its `run.json` lists, each with its size and hash, and
 * those named `beside` them.
 *
 * @returns the record
 */
export function wholeRunIn(folder: string, beside: readonly string[] = []): ParsedRecord {
  const record = runRecordOf(folder);
  const listed = record.files.map(({ name }: { name: string }) => name);
  const present = (readdirSync(folder, { recursive: true, withFileTypes: true }) ?? [])
    .filter((entry) => entry.isFile())
    .map((entry) => relative(folder, join(entry.parentPath, entry.name)));
  if (JSON.stringify([...listed, ...beside, 'run.json'].sort()) !== JSON.stringify(present.sort())) {
    throw new Error(`${folder} holds ${present.join(' ')}, its record lists ${listed.join(' ')}`);
  }
  for (const { name, bytes, sha256 } of record.files) {
    const content = readFileSync(join(folder, name));
    if (content.length !== bytes || createHash('sha256').update(content).digest('hex') !== sha256) {
      throw new Error(`${join(folder, name)} is not the file that the record lists`);
    }
  }
  return record;
}

/** Whole sets of a file of two or three lines each, damaged ones left out: the number as it stands there, and the text. */
export function setsInText(text: string): { readonly number: string; readonly text: string }[] {
  return [...text.matchAll(/(?:^(?![12] ).*\n)?^1 (.{5}).*\n^2 \1.*\n/gm)].map((match) => ({
    number: match[1],
    text: match[0],
  }));
}

/** Every eighth object of a sample catalog, and all that were put there on purpose: enough, and read in no time. */
export function smallerCatalog(path: string): string {
  return setsInText(readFileSync(path, 'utf8'))
    .filter(({ number }) => Number(number.slice(1)) % 8 === 1 || /^(97|98|W90|W0181|W0410)/.test(number))
    .map((set) => set.text)
    .join('');
}

/**
 * The environment of a command whose clock tells what `body` returns, a line of JavaScript that may use
 * `RealDate` and `asked`, how often the clock was asked. `path` is for a module that the command loads first.
 */
export function withClock(path: string, body: string): Record<string, string> {
  writeFileSync(
    path,
    `const RealDate = Date;
     let asked = 0;
     const nowMs = () => { asked += 1; ${body} };
     globalThis.Date = class extends RealDate {
       constructor(...given) { if (given.length === 0) super(nowMs()); else super(...given); }
       static now() { return nowMs(); }
     };\n`,
  );
  return { NODE_OPTIONS: `--import ${pathToFileURL(path).href}` };
}
