import { formatUtc } from '../elements/utc.js';
import { CHANGE_KINDS, type Change, type ChangeKind } from '../tables/changes-csv.js';
import { compareDesignators } from '../tables/compare-designators.js';
import { exponentText } from '../tables/csv-text.js';
import { terminalText } from '../tables/terminal-text.js';

/** By this factor a probability must change to be called risen or fallen: less is the noise of new element sets. */
const CHANGE_FACTOR = 2;

/** Below this a probability is as good as none, and a change of it is no news (own choice). */
const PROBABILITY_FLOOR = 1e-10;

/** One encounter as a run keeps it for the runs after it. */
export type SeenEncounter = {
  readonly object1Designator: string;
  readonly object1Name: string;
  readonly object2Designator: string;
  readonly object2Name: string;
  readonly tcaMs: number;
  readonly missDistanceM: number;
  readonly collisionProbability: number | undefined;
  /** The shorter of the two orbital periods, seconds. */
  readonly shorterPeriodS: number;
};

/** An encounter with its past. */
export type KnownEncounter = SeenEncounter & {
  /** Start of the window of the first run that listed it, milliseconds of UTC since 1970-01-01. */
  readonly firstSeenMs: number;
  /** How many runs listed it up to this one, this one included. */
  readonly runsSeen: number;
};

/** An earlier run, as far as it matters for a comparison. */
export type PastRun = {
  /** Name of its folder. */
  readonly name: string;
  readonly startMs: number;
  readonly encounters: readonly KnownEncounter[];
};

/** What tonight's run covered. */
type Coverage = {
  readonly startMs: number;
  readonly endMs: number;
  /** Whether tonight the two objects were screened against each other. */
  readonly isScreened: (designatorA: string, designatorB: string) => boolean;
};

export type Comparison = {
  /** Rows of `changes.csv` in their order: by kind, then probability from high to low. */
  readonly changes: readonly Change[];
  /** Tonight's encounters, in the order given, with what to keep for the next run. */
  readonly known: readonly KnownEncounter[];
};

/**
 * Compares tonight's encounters with those of earlier runs.
 *
 * An encounter is the same in two runs when the pair is the same, whichever object comes first, and the times
 * of closest approach differ by at most a quarter of the shorter orbital period: two passes of one pair lie
 * at least about half a period apart. Each has one counterpart at most; of several possible ones the nearest
 * in time are taken first.
 *
 * An encounter that the latest run does not list, but an earlier one does, is compared with that: it is not
 * new. What tonight does not list is told once, against the latest run.
 *
 * @param past earlier runs, the latest first
 */
export function compareWithPast(
  tonight: readonly SeenEncounter[],
  past: readonly PastRun[],
  coverage: Coverage,
): Comparison {
  const before = new Map<SeenEncounter, KnownEncounter>();
  const continued = new Set<KnownEncounter>();
  for (const run of past) {
    const open = tonight.filter((encounter) => !before.has(encounter));
    for (const [encounter, earlier] of matches(open, run.encounters)) {
      before.set(encounter, earlier);
      continued.add(earlier);
    }
  }
  const known = tonight.map((encounter) => {
    const earlier = before.get(encounter);
    return {
      ...encounter,
      firstSeenMs: earlier?.firstSeenMs ?? coverage.startMs,
      runsSeen: (earlier?.runsSeen ?? 0) + 1,
    };
  });
  const listed = known.map((encounter, i): Change => {
    const earlier = before.get(tonight[i]);
    return {
      ...objectsOf(encounter),
      kind: earlier === undefined ? 'new' : trend(encounter, earlier),
      current: figures(encounter),
      previous: earlier === undefined ? undefined : figures(earlier),
      firstSeenMs: encounter.firstSeenMs,
      runsSeen: encounter.runsSeen,
    };
  });
  const lost = (past[0]?.encounters ?? [])
    .filter((earlier) => !continued.has(earlier))
    .map((earlier): Change => {
      return {
        ...objectsOf(earlier),
        kind: kindOfLost(earlier, coverage),
        current: undefined,
        previous: figures(earlier),
        firstSeenMs: earlier.firstSeenMs,
        runsSeen: earlier.runsSeen,
      };
    });
  return { changes: [...listed, ...lost].sort(compareChanges), known };
}

/**
 * What the summary on the terminal says about the changes: how many of each kind, and the passes that rose
 * tonight one by one, the likeliest first.
 *
 * @param limit how many risen passes are told
 * @param previous name of the run compared with, `undefined` if there was none
 */
export function changeLines(
  changes: readonly Change[],
  limit: number,
  previous: string | undefined,
): readonly string[] {
  if (previous === undefined) return ['No earlier run to compare with: every encounter counts as new.'];
  const counts = CHANGE_KINDS.map(
    (kind) => [kind, changes.filter((change) => change.kind === kind).length] as const,
  );
  const told = counts.filter(([, count]) => count > 0).map(([kind, count]) => `${count} ${kind}`);
  const risen = changes.filter((change) => change.kind === 'rose');
  return [
    ...risen.slice(0, limit).map(riseLine),
    ...(risen.length > limit ? [`and ${risen.length - limit} more that rose: see changes.csv`] : []),
    `Since run ${previous}: ${told.length === 0 ? 'nothing then, nothing now' : told.join(', ')}.`,
  ];
}

/** Pairs of the same encounter in two runs, one to one. */
function matches(
  tonight: readonly SeenEncounter[],
  earlier: readonly KnownEncounter[],
): (readonly [SeenEncounter, KnownEncounter])[] {
  const earlierByPair = new Map<string, KnownEncounter[]>();
  for (const b of earlier) {
    const key = pairKey(b);
    const same = earlierByPair.get(key);
    if (same === undefined) earlierByPair.set(key, [b]);
    else same.push(b);
  }
  const candidates: { a: SeenEncounter; b: KnownEncounter; apartMs: number }[] = [];
  for (const a of tonight) {
    for (const b of earlierByPair.get(pairKey(a)) ?? []) {
      const apartMs = Math.abs(a.tcaMs - b.tcaMs);
      const quarterPeriodMs = (Math.min(a.shorterPeriodS, b.shorterPeriodS) * 1000) / 4;
      if (apartMs <= quarterPeriodMs) candidates.push({ a, b, apartMs });
    }
  }
  candidates.sort((x, y) => x.apartMs - y.apartMs || x.a.tcaMs - y.a.tcaMs || x.b.tcaMs - y.b.tcaMs);
  const taken = new Set<SeenEncounter>();
  const pairs: (readonly [SeenEncounter, KnownEncounter])[] = [];
  for (const { a, b } of candidates) {
    if (taken.has(a) || taken.has(b)) continue;
    taken.add(a).add(b);
    pairs.push([a, b]);
  }
  return pairs;
}

function pairKey({ object1Designator, object2Designator }: SeenEncounter): string {
  return [object1Designator, object2Designator].sort(compareDesignators).join(' ');
}

function trend(now: SeenEncounter, earlier: SeenEncounter): ChangeKind {
  const ratio =
    now.collisionProbability === undefined || earlier.collisionProbability === undefined
      ? earlier.missDistanceM / now.missDistanceM
      : Math.max(now.collisionProbability, PROBABILITY_FLOOR) /
        Math.max(earlier.collisionProbability, PROBABILITY_FLOOR);
  if (ratio >= CHANGE_FACTOR) return 'rose';
  return ratio <= 1 / CHANGE_FACTOR ? 'fell' : 'steady';
}

function kindOfLost(earlier: SeenEncounter, { startMs, endMs, isScreened }: Coverage): ChangeKind {
  if (earlier.tcaMs < startMs) return 'past';
  if (earlier.tcaMs > endMs) return 'outside-window';
  return isScreened(earlier.object1Designator, earlier.object2Designator) ? 'gone' : 'not-screened';
}

function objectsOf(encounter: SeenEncounter): Pick<Change, 'object1' | 'object2'> {
  return {
    object1: { designator: encounter.object1Designator, name: encounter.object1Name },
    object2: { designator: encounter.object2Designator, name: encounter.object2Name },
  };
}

function figures({ tcaMs, missDistanceM, collisionProbability }: SeenEncounter) {
  return { tcaMs, missDistanceM, collisionProbability };
}

function compareChanges(a: Change, b: Change): number {
  const [x, y] = [(a.current ?? a.previous)!, (b.current ?? b.previous)!];
  return (
    CHANGE_KINDS.indexOf(a.kind) - CHANGE_KINDS.indexOf(b.kind) ||
    (y.collisionProbability ?? -1) - (x.collisionProbability ?? -1) ||
    x.missDistanceM - y.missDistanceM ||
    x.tcaMs - y.tcaMs ||
    compareDesignators(a.object1.designator, b.object1.designator) ||
    compareDesignators(a.object2.designator, b.object2.designator)
  );
}

function riseLine({ current, previous, object1, object2 }: Change): string {
  const side = ({ designator, name }: Change['object1']) => terminalText(`${designator} ${name}`.trimEnd());
  const probability = (value: number | undefined) => (value === undefined ? 'none' : exponentText(value, 1));
  return (
    `Rose: ${side(object1)} / ${side(object2)}, ` +
    `TCA ${formatUtc(Math.round(current!.tcaMs / 1000) * 1000).replace('.000Z', 'Z')}, ` +
    `probability ${probability(previous!.collisionProbability)} -> ${probability(current!.collisionProbability)}, ` +
    `miss ${previous!.missDistanceM.toFixed(0)} -> ${current!.missDistanceM.toFixed(0)} m`
  );
}
