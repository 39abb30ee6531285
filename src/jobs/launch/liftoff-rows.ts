import type { BrokenLimit, LiftoffEncounter, LiftoffRow } from '../../tables/slips-csv.js';
import { type EncounterRecords, FIELD, FIELDS } from '../encounter-records.js';
import type { ScreenedObject } from '../screened-object.js';
import { probablySame } from './flying-along.js';
import type { LiftoffLimits } from './launch-options.js';
import type { LiftoffSearch } from './liftoff-search.js';

/** A row of `slips.csv` before its place among the others is known. */
export type UnrankedLiftoff = Omit<LiftoffRow, 'bestRank'>;

type Tally = {
  encounters: number;
  violations: number;
  tooClose: number;
  tooProbable: number;
  withoutFigure: number;
  /** Offsets into the records, -1 for none. */
  closest: number;
  mostProbable: number;
};

/**
 * What each liftoff of a search meets, in the order of its slips.
 *
 * @param liftoffMs nominal liftoff
 */
export function liftoffRows(
  search: LiftoffSearch,
  records: EncounterRecords,
  liftoffMs: number,
  limits: LiftoffLimits,
): UnrankedLiftoff[] {
  const { slipsMs, phaseCount, objects, flying } = search;
  const { clearKm, alertPc } = limits;
  const hasNoLimit = clearKm === undefined && alertPc === undefined;
  const tallies = slipsMs.map(
    (): Tally => ({
      encounters: 0,
      violations: 0,
      tooClose: 0,
      tooProbable: 0,
      withoutFigure: 0,
      closest: -1,
      mostProbable: -1,
    }),
  );
  const { data } = records;
  for (let at = 0; at < FIELDS * records.size; at += FIELDS) {
    const tally = tallies[Math.floor(data[at + FIELD.first] / phaseCount)];
    const probability = data[at + FIELD.probability];
    tally.encounters++;
    const tooClose = clearKm !== undefined && data[at + FIELD.missKm] < clearKm;
    const tooProbable = alertPc !== undefined && probability >= alertPc;
    const withoutFigure = alertPc !== undefined && Number.isNaN(probability);
    if (tooClose) tally.tooClose++;
    if (tooProbable) tally.tooProbable++;
    if (withoutFigure) tally.withoutFigure++;
    if (hasNoLimit || tooClose || tooProbable || withoutFigure) tally.violations++;
    if (isBefore(data, at, tally.closest, FIELD.missKm, 1)) tally.closest = at;
    if (!Number.isNaN(probability) && isBefore(data, at, tally.mostProbable, FIELD.probability, -1)) {
      tally.mostProbable = at;
    }
  }
  return slipsMs.map((slipMs, s) => {
    const tally = tallies[s];
    const along = flying.filter(({ first }) => Math.floor(first / phaseCount) === s);
    const flyingAlong = new Set(along.map(({ second }) => second)).size;
    const all: readonly (readonly [BrokenLimit, number, string])[] = [
      ['any encounter', hasNoLimit ? tally.encounters : 0, counted(tally.encounters, 'encounter')],
      ['too close', tally.tooClose, `${tally.tooClose} closer than ${clearKm} km`],
      [
        'too probable',
        tally.tooProbable,
        `${tally.tooProbable} with a probability of ${exponent(alertPc)} or more`,
      ],
      ['no probability', tally.withoutFigure, `${tally.withoutFigure} without a probability`],
      [
        'flying along',
        flyingAlong,
        flyingAlong === 0
          ? ''
          : `${counted(flyingAlong, 'object')} flying along (${firstAlong(along, objects)})`,
      ],
    ];
    const reasons = all.filter(([, count]) => count > 0);
    const violations = tally.violations + flyingAlong;
    return {
      liftoffMs: liftoffMs + slipMs,
      slipMs,
      isClear: violations === 0,
      broken: reasons.map(([limit]) => limit),
      whyNot: reasons.map(([, , words]) => words).join('; '),
      encounters: tally.encounters,
      violations,
      flyingAlong,
      closest: encounterAt(data, tally.closest, objects),
      mostProbable: encounterAt(data, tally.mostProbable, objects),
    };
  });
}

/** Adds the place of each liftoff among all; the order of the rows stays. */
export function withBestRank(rows: readonly UnrankedLiftoff[]): LiftoffRow[] {
  const order = rows.toSorted(
    (a, b) =>
      Number(b.isClear) - Number(a.isClear) ||
      a.violations - b.violations ||
      (a.mostProbable?.collisionProbability ?? 0) - (b.mostProbable?.collisionProbability ?? 0) ||
      (b.closest?.missDistanceM ?? Number.MAX_VALUE) - (a.closest?.missDistanceM ?? Number.MAX_VALUE) ||
      Math.abs(a.slipMs) - Math.abs(b.slipMs) ||
      a.slipMs - b.slipMs,
  );
  const rankOf = new Map(order.map((row, k) => [row, k + 1]));
  return rows.map((row) => ({ ...row, bestRank: rankOf.get(row) as number }));
}

/** Whether one record comes before another by a field, then by TCA and objects, so that ties leave no choice. */
function isBefore(data: Float64Array, at: number, other: number, field: number, sign: 1 | -1): boolean {
  if (other < 0) return true;
  return (
    (sign * (data[at + field] - data[other + field]) ||
      data[at + FIELD.tcaMs] - data[other + FIELD.tcaMs] ||
      data[at + FIELD.first] - data[other + FIELD.first] ||
      data[at + FIELD.second] - data[other + FIELD.second]) < 0
  );
}

function encounterAt(
  data: Float64Array,
  at: number,
  objects: readonly ScreenedObject[],
): LiftoffEncounter | undefined {
  if (at < 0) return undefined;
  const first = objects[data[at + FIELD.first]];
  const second = objects[data[at + FIELD.second]];
  const probability = data[at + FIELD.probability];
  return {
    object1Designator: first.designator,
    object2Designator: second.designator,
    object2Name: second.name,
    tcaMs: data[at + FIELD.tcaMs],
    missDistanceM: 1000 * data[at + FIELD.missKm],
    collisionProbability: Number.isNaN(probability) ? undefined : probability,
  };
}

function firstAlong(along: LiftoffSearch['flying'], objects: readonly ScreenedObject[]): string {
  const { first, second } = probablySame(along, objects)[0];
  return `${objects[second].designator} beside ${objects[first].designator}`;
}

function counted(count: number, what: string): string {
  return `${count} ${what}${count === 1 ? '' : 's'}`;
}

function exponent(value: number | undefined): string {
  return (value ?? Number.NaN).toExponential().toUpperCase();
}
