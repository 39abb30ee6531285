import type { Line } from './lines.js';

const LINE_ONE = /^1 (?:[\dA-Z ][\d ]{4}[A-Z ]|.{58})/;
const LINE_TWO = /^2 (?:[\dA-Z ][\d ]{4} |.{58})/;
/** What is left of an element line that lost its end. */
const STUMP = /^[12](?:\s[\s\d.+-]*)?$/;
const ELEMENT_LINE_LENGTH = 60;
const ELEMENT_LINE_DIGITS = 20;
/** A web page in the wrong place must not fill the memory. */
const MOST_LINES_KEPT = 20;

const NO_LINE_TWO = 'line 1 without a line 2 after it';

/** Lines that claim to be one element set. */
export type SetLines = {
  readonly kind: 'set';
  readonly name: Line | undefined;
  readonly one: Line;
  readonly two: Line;
};

/** Lines that cannot be an element set. */
export type StrayLines = {
  readonly kind: 'stray';
  /** Number of the first line. */
  readonly first: number;
  readonly count: number;
  /** The lines joined by `\n`; of a long run only the first, and a line that says how many more. */
  readonly text: string;
  /** The line 1 or line 2 among them. */
  readonly element: Line | undefined;
  readonly detail: string;
};

export type LineGroup = SetLines | StrayLines;

export type LineGrouper = {
  readonly push: (lines: readonly Line[]) => LineGroup[];
  readonly end: () => LineGroup[];
};

/**
 * Sorts the lines of a file into sets and strays; every line but comments (`#`) ends up in exactly one
 * group. A name is any text directly before a line 1. Text that looks like a damaged line 1 or line 2 is
 * never a name: it goes with the other line of its set into one stray group.
 */
export function lineGrouper(): LineGrouper {
  /** Text that may yet turn out to be a name, or not to belong to any set. */
  let run: Line[] = [];
  let runCount = 0;
  let runLast: Line | undefined;
  let pending: { readonly name: Line | undefined; readonly one: Line } | undefined;

  function endRun(groups: LineGroup[], name?: Line): void {
    const count = runCount - (name === undefined ? 0 : 1);
    const lines = run.filter((line) => line !== name);
    [run, runCount, runLast] = [[], 0, undefined];
    if (count === 0) return;
    const detail =
      count === 1 ? 'not part of an element set' : `${count} lines that are not part of an element set`;
    groups.push(stray(lines, count, undefined, detail));
  }

  function endPending(groups: LineGroup[], detail: string, damaged: readonly Line[] = []): void {
    if (pending === undefined) return;
    const { name, one } = pending;
    const lines = name === undefined ? [one, ...damaged] : [name, one, ...damaged];
    groups.push(stray(lines, lines.length, one, detail));
    pending = undefined;
  }

  function take(line: Line, groups: LineGroup[]): void {
    const body = line.text.trimStart();
    if (body.startsWith('#')) return;
    if (LINE_ONE.test(body)) {
      endPending(groups, NO_LINE_TWO);
      const name = runLast !== undefined && canBeName(runLast) ? runLast : undefined;
      endRun(groups, name);
      pending = { name, one: line };
    } else if (LINE_TWO.test(body)) {
      if (pending === undefined) {
        const before =
          runCount === 0 ? '' : ` (instead ${runCount === 1 ? 'a line' : `${runCount} lines`} of other text)`;
        groups.push(stray([...run, line], runCount + 1, line, `line 2 without a line 1 before it${before}`));
        [run, runCount, runLast] = [[], 0, undefined];
      } else {
        groups.push({ kind: 'set', ...pending, two: line });
        pending = undefined;
      }
    } else if (pending !== undefined && !canBeName(line)) {
      endPending(groups, 'line 1 followed by a line that is no line 2', [line]);
    } else {
      endPending(groups, NO_LINE_TWO);
      if (run.length < MOST_LINES_KEPT) run.push(line);
      runCount += 1;
      runLast = line;
    }
  }

  return {
    push(lines) {
      const groups: LineGroup[] = [];
      for (const line of lines) take(line, groups);
      return groups;
    },
    end() {
      const groups: LineGroup[] = [];
      endPending(groups, NO_LINE_TWO);
      endRun(groups);
      return groups;
    },
  };
}

function stray(lines: readonly Line[], count: number, element: Line | undefined, detail: string): StrayLines {
  const texts = lines.map((line) => line.text);
  if (count > lines.length) texts.push(`(${count - lines.length} more lines)`);
  return { kind: 'stray', first: lines[0].number, count, text: texts.join('\n'), element, detail };
}

function canBeName(line: Line): boolean {
  const body = line.text.trim();
  if (line.cut || STUMP.test(body)) return false;
  return body.length < ELEMENT_LINE_LENGTH || body.replace(/\D/g, '').length < ELEMENT_LINE_DIGITS;
}
