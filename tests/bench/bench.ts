/*
 * The benchmark: workloads through the real command against a yardstick measured in the same run.
 *
 *   npm run bench -- [--public-catalog FILE --start UTC] [--only NAME,NAME] [--quick] [--workers N]
 *
 * The yardstick ("floor") is what satellite.js's bulk propagator takes for the states of all objects on a grid of
 * 60 s over the window, in as many threads: propagation alone. It is measured on a part of the window right before
 * and right after each run. Results go to standard output and to bench-output/bench.json and bench.txt.
 */
import { spawn } from 'node:child_process';
import { mkdirSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { availableParallelism, cpus, tmpdir, totalmem } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { parseArgs } from 'node:util';
import type { ElementSet } from '../../src/elements/element-set.js';
import { readElementFiles } from '../../src/elements/read.js';
import { selectSets } from '../../src/elements/select.js';
import { parseUtc } from '../../src/elements/utc.js';
import { syntheticCatalog, walkerShell } from '../synthetic/catalog.js';
import { createFloor } from './floor.js';
import { toOmmCsv } from './omm.js';

const COMMAND = fileURLToPath(new URL('../../bin/wideberth.js', import.meta.url));
const OUTPUT = fileURLToPath(new URL('../../bench-output/', import.meta.url));
const SYNTHETIC_START_MS = Date.UTC(2026, 11, 1);
const FIRST_NINE_DIGIT_DESIGNATOR = 900_000_000;

type Workload = {
  readonly name: string;
  /** Empty for all on all. */
  readonly fleet: readonly ElementSet[];
  readonly catalog: readonly ElementSet[];
  readonly startMs: number;
  readonly days: number;
  /** At most this part of the floor; `undefined` where only the growth is of interest. */
  readonly target?: number;
};

type Result = {
  readonly name: string;
  readonly satellites: number;
  readonly objects: number;
  readonly days: number;
  readonly floorS: number;
  readonly wallS: number;
  readonly ratio: number;
  readonly target: number | null;
  readonly peakMemoryMB: number;
  readonly encounters: number;
  readonly stagesS: Readonly<Record<string, number>>;
};

const { values: options } = parseArgs({
  options: {
    'public-catalog': { type: 'string' },
    start: { type: 'string' },
    only: { type: 'string' },
    quick: { type: 'boolean', default: false },
    workers: { type: 'string' },
  },
});
const threads = options.workers === undefined ? availableParallelism() : Number(options.workers);

const workloads = [...(await publicWorkloads()), ...syntheticWorkloads()].filter(
  ({ name }) => options.only === undefined || options.only.split(',').some((part) => name.startsWith(part)),
);
if (workloads.length === 0 && !options.only?.includes('launch'))
  throw new Error(`--only is ${options.only}: no workload starts like that`);

const results: Result[] = [];
console.log(
  `${cpus()[0].model}, ${threads} threads, ${Math.round(totalmem() / 2 ** 30)} GiB, Node ${process.version}`,
);
console.log(
  rowText([
    'workload',
    'satellites',
    'objects',
    'days',
    'floor s',
    'wall s',
    'ratio',
    'target',
    'peak MB',
    'encounters',
  ]),
);
for (const workload of workloads) {
  const result = await measured(workload);
  results.push(result);
  console.log(resultText(result));
}
const slips =
  options.only === undefined || options.only.includes('launch') ? await measuredSlips() : undefined;
if (slips !== undefined) {
  console.log(
    `launch-61-slips: one liftoff ${slips.oneS.toFixed(1)} s, 61 liftoffs ${slips.allS.toFixed(1)} s, ratio ${slips.ratio.toFixed(2)} (target 10)`,
  );
}
mkdirSync(OUTPUT, { recursive: true });
const machine = {
  cpu: cpus()[0].model,
  threads,
  memoryGiB: Math.round(totalmem() / 2 ** 30),
  node: process.version,
};
writeFileSync(
  join(OUTPUT, 'bench.json'),
  `${JSON.stringify({ machine, quick: options.quick, results, slips: slips ?? null }, null, 2)}\n`,
);
writeFileSync(join(OUTPUT, 'bench.txt'), `${results.map(resultText).join('\n')}\n`);

/** The public catalog, only where its file is given. */
async function publicWorkloads(): Promise<Workload[]> {
  const file = options['public-catalog'];
  if (file === undefined) return [];
  const startMs = parseUtc(options.start ?? '');
  if (startMs === undefined) throw new Error('--public-catalog needs --start, a time near its epochs');
  const { sets } = await readElementFiles([file]);
  const { catalog } = selectSets({ fleet: [], catalog: sets, startMs });
  // Every n-th of the near-circular low satellites stands for a fleet.
  const low = catalog.filter((set) => set.meanMotionRevPerDay > 14.5 && set.eccentricity < 0.003);
  const fleet = low.filter((_, i) => i % Math.floor(low.length / 75) === 0).slice(0, 75);
  const days = options.quick ? 1 : 7;
  return [
    { name: 'fleet-75-public', fleet, catalog, startMs, days, target: 0.1 },
    { name: 'all-on-all-public', fleet: [], catalog, startMs, days, target: 0.5 },
  ];
}

function syntheticWorkloads(): Workload[] {
  const startMs = SYNTHETIC_START_MS;
  const part = options.quick ? 0.1 : 1;
  const crowd = (count: number) =>
    syntheticCatalog({
      seed: 1,
      count: Math.round(count * part),
      epochMs: startMs,
      firstDesignator: FIRST_NINE_DIGIT_DESIGNATOR,
    });
  const shell = (count: number) =>
    walkerShell({
      count: Math.round(count * part),
      planes: 60,
      altitudeKm: 550,
      inclinationDeg: 53,
      epochMs: startMs,
    });
  const growth = (
    name: string,
    fleet: readonly ElementSet[],
    catalog: readonly ElementSet[],
    days: number,
  ) => ({
    name: `growth-${name}`,
    fleet,
    catalog,
    startMs,
    days,
  });
  return [
    { name: 'all-on-all-100000', fleet: [], catalog: crowd(100_000), startMs, days: 1, target: 1 },
    { name: 'shell-6000-50000', fleet: shell(6000), catalog: crowd(50_000), startMs, days: 3, target: 0.4 },
    growth('objects-12500', [], crowd(12_500), 0.5),
    growth('objects-25000', [], crowd(25_000), 0.5),
    growth('objects-50000', [], crowd(50_000), 0.5),
    growth('satellites-60', shell(60), crowd(25_000), 1),
    growth('satellites-600', shell(600), crowd(25_000), 1),
    growth('satellites-6000', shell(6000), crowd(25_000), 1),
    growth('days-1', shell(600), crowd(25_000), 1),
    growth('days-3', shell(600), crowd(25_000), 3),
    growth('days-7', shell(600), crowd(25_000), 7),
  ];
}

async function measured({ name, fleet, catalog, startMs, days, target }: Workload): Promise<Result> {
  const folder = mkdtempSync(join(tmpdir(), 'wideberth-bench-'));
  try {
    writeFileSync(join(folder, 'fleet.csv'), toOmmCsv(fleet));
    writeFileSync(join(folder, 'catalog.csv'), toOmmCsv(catalog));
    const own = new Set(fleet.map(({ designator }) => designator));
    const all = [...fleet, ...catalog.filter(({ designator }) => !own.has(designator))];
    const before = await floorOf(all, startMs, days);
    const out = join(folder, 'out');
    const wallS = await run([
      'screen',
      ...(fleet.length === 0 ? ['--all-on-all'] : ['--fleet', join(folder, 'fleet.csv')]),
      '--catalog',
      join(folder, 'catalog.csv'),
      '--start',
      new Date(startMs).toISOString(),
      '--days',
      String(days),
      '--miss-km',
      '5',
      '--max-age-days',
      '3650',
      '--workers',
      String(threads),
      '--out',
      out,
    ]);
    const after = await floorOf(all, startMs, days);
    const record = JSON.parse(readFileSync(join(out, 'run.json'), 'utf8'));
    const floorS = (before + after) / 2;
    return {
      name,
      satellites: fleet.length,
      objects: all.length,
      days,
      floorS,
      wallS,
      ratio: wallS / floorS,
      target: target ?? null,
      peakMemoryMB: record.environment.peakMemoryMB,
      encounters: record.counts.encounters,
      stagesS: record.environment.timingsS,
    };
  } finally {
    rmSync(folder, { recursive: true });
  }
}

/** A batch of fifty near the crowd, one liftoff against sixty-one of them. */
async function measuredSlips(): Promise<{ oneS: number; allS: number; ratio: number }> {
  const startMs = SYNTHETIC_START_MS;
  const folder = mkdtempSync(join(tmpdir(), 'wideberth-bench-'));
  try {
    const catalog = syntheticCatalog({
      seed: 1,
      count: options.quick ? 2500 : 25_000,
      epochMs: startMs,
      firstDesignator: FIRST_NINE_DIGIT_DESIGNATOR,
    });
    const batch = walkerShell({
      count: 50,
      planes: 1,
      altitudeKm: 330,
      inclinationDeg: 53,
      epochMs: startMs,
    });
    writeFileSync(join(folder, 'catalog.csv'), toOmmCsv(catalog));
    writeFileSync(join(folder, 'batch.csv'), toOmmCsv(batch));
    const launch = (...slips: string[]) =>
      run([
        'launch',
        '--batch',
        join(folder, 'batch.csv'),
        '--catalog',
        join(folder, 'catalog.csv'),
        '--liftoff',
        new Date(startMs - 3_600_000).toISOString(),
        '--release',
        new Date(startMs).toISOString(),
        '--days',
        '1',
        '--miss-km',
        '25',
        '--workers',
        String(threads),
        '--out',
        join(folder, 'out'),
        ...slips,
      ]);
    const oneS = await launch();
    const allS = await launch('--slip-from', '-30', '--slip-to', '30', '--slip-every', '1');
    return { oneS, allS, ratio: allS / oneS };
  } finally {
    rmSync(folder, { recursive: true });
  }
}

/** Median of three, threads closed again so that the run has the machine to itself. */
async function floorOf(sets: readonly ElementSet[], startMs: number, days: number): Promise<number> {
  const floor = await createFloor(sets, startMs, days, threads);
  await floor.measureS();
  const figures = [await floor.measureS(), await floor.measureS(), await floor.measureS()];
  await floor.close();
  return figures.sort((a, b) => a - b)[1];
}

/** @returns wall time of the whole command, seconds */
function run(args: readonly string[]): Promise<number> {
  const started = performance.now();
  return new Promise((resolve, reject) => {
    const child = spawn(process.execPath, [COMMAND, ...args], { stdio: ['ignore', 'ignore', 'pipe'] });
    let messages = '';
    child.stderr.on('data', (chunk) => {
      messages += chunk;
    });
    child.on('error', reject);
    child.on('close', (status) => {
      if (status === 0) resolve((performance.now() - started) / 1000);
      else reject(new Error(`wideberth ${args.join(' ')} ended with status ${status}:\n${messages}`));
    });
  });
}

function resultText(result: Result): string {
  return rowText([
    result.name,
    String(result.satellites),
    String(result.objects),
    String(result.days),
    result.floorS.toFixed(1),
    result.wallS.toFixed(1),
    result.ratio.toFixed(3),
    result.target === null ? '' : String(result.target),
    String(result.peakMemoryMB),
    String(result.encounters),
  ]);
}

function rowText(cells: readonly string[]): string {
  return cells.map((cell, i) => (i === 0 ? cell.padEnd(24) : cell.padStart(10))).join(' ');
}
