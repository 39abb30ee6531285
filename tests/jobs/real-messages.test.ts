import { readdirSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { CAUTION } from '../../src/caution.js';
import { assessEncounter } from '../../src/probability/assess-encounter.js';
import {
  type ConjunctionMessage,
  type ConjunctionMessageObject,
  readConjunctionMessage,
} from '../../src/tables/read-conjunction-message.js';
import {
  freshFolder,
  type Row,
  rowsOf,
  runCommand,
  runRecordOf,
  SAMPLES,
  smallerCatalog,
} from '../cli/real-command.js';

/*
 * The conjunction messages of a run of the real command, read back.
 */

const folder = freshFolder();
afterAll(folder.remove);
const at = (name: string) => join(folder.path, name);

/** Among probabilities that lie close together, to see where the line is drawn. */
const FROM = 1.2e-7;

let rows: Row[];
let messages: Map<string, ConjunctionMessage>;

const compact = (utc: string) => utc.replaceAll(/[-:.Z]/g, '');
const fileOf = (row: Row) =>
  `${compact(row.tca_utc)}_${row.object1_designator}_${row.object2_designator}.kvn`;

beforeAll(async () => {
  writeFileSync(at('catalog.tle'), smallerCatalog(join(SAMPLES, 'catalog.tle')));
  const { status, stderr } = await runCommand([
    ...['screen', '--fleet', join(SAMPLES, 'fleet.tle'), '--catalog', at('catalog.tle')],
    ...['--objects', join(SAMPLES, 'objects.csv'), '--start', '2026-12-01T00:00:00Z', '--days', '1'],
    ...['--volume-rtn-km', '4,25,25', '--cdm-from-pc', String(FROM), '--out', at('out')],
  ]);
  expect(status, stderr).toBe(0);
  rows = rowsOf(at('out/conjunctions.csv'));
  messages = new Map(
    readdirSync(at('out/cdm')).map((name) => [
      name,
      readConjunctionMessage(readFileSync(at(`out/cdm/${name}`), 'utf8'), name),
    ]),
  );
});

const enough = () => rows.filter((row) => Number(row.collision_probability) >= FROM);

test('one for each encounter from the given probability on, and no other', () => {
  expect(enough().length).toBeGreaterThan(8);
  expect(enough().length).toBeLessThan(rows.length);
  expect([...messages.keys()].sort()).toEqual(enough().map(fileOf).sort());
  expect(runRecordOf(at('out')).counts.messages).toBe(messages.size);
});

test('each says what its row says', () => {
  for (const row of enough()) {
    const message = messages.get(fileOf(row)) as ConjunctionMessage;
    expect(message.tcaMs).toBe(Date.parse(row.tca_utc));
    expect(message.missDistanceM).toBe(Number(row.miss_distance_m));
    expect(message.relativeSpeedMPerS).toBe(Number(row.relative_speed_m_s));
    expect(message.relativePositionRtnM).toEqual(
      ['r', 't', 'n'].map((axis) => Number(row[`relative_position_${axis}_m`])),
    );
    expect(message.relativeVelocityRtnMPerS).toEqual(
      ['r', 't', 'n'].map((axis) => Number(row[`relative_velocity_${axis}_m_s`])),
    );
    // Six digits in the row, ten in the message.
    const { collisionProbability = Number.NaN } = message;
    expect(collisionProbability / Number(row.collision_probability)).toBeCloseTo(1, 5);
    expect(message.collisionProbabilityMethod).toBe(row.collision_probability_method);
    for (const [side, object] of [
      ['object1', message.object1],
      ['object2', message.object2],
    ] as const) {
      expect(object.designator).toBe(row[`${side}_designator`]);
      if (row[`${side}_name`] !== '') expect(object.name).toBe(row[`${side}_name`]);
      [0, 1, 2].forEach((k) => {
        const sigma = Number(row[`${side}_sigma_${'rtn'[k]}_m`]);
        expect(Math.sqrt(object.positionCovarianceRtnM2[k][k]) / sigma).toBeCloseTo(1, 5);
      });
    }
    expect(message.other.get('SCREEN_ENTRY_TIME')).toBe(row.screen_entry_utc.replace('Z', ''));
    expect(message.other.get('SCREEN_EXIT_TIME')).toBe(row.screen_exit_utc.replace('Z', ''));
    expect(message.other.get('START_SCREEN_PERIOD')).toBe('2026-12-01T00:00:00.000');
    expect(message.other.get('STOP_SCREEN_PERIOD')).toBe('2026-12-02T00:00:00.000');
    expect(message.other.get('SCREEN_VOLUME_SHAPE')).toBe('BOX');
    expect(message.comments.join(' ')).toContain(CAUTION);
    expect(message.comments.join(' ')).toContain(`${row.hard_body_radius_m} m`);
  }
});

test('each holds states and covariances from which the figures of its row follow', () => {
  const given = ({ state, positionCovarianceRtnM2 }: ConjunctionMessageObject) => ({
    ...state,
    covarianceRtnM2: positionCovarianceRtnM2,
  });
  for (const row of enough()) {
    const message = messages.get(fileOf(row)) as ConjunctionMessage;
    const assessed = assessEncounter({
      object1: given(message.object1),
      object2: given(message.object2),
      hardBodyRadiusM: Number(row.hard_body_radius_m),
    });
    // States are written to a micrometer and less; the turn to EME2000 keeps lengths and angles.
    expect(Math.abs(assessed.missDistanceM - Number(row.miss_distance_m))).toBeLessThan(0.002);
    expect(Math.abs(assessed.relativeSpeedMPerS - Number(row.relative_speed_m_s))).toBeLessThan(0.0002);
    ['r', 't', 'n'].forEach((axis, k) => {
      const written = Number(row[`relative_position_${axis}_m`]);
      expect(Math.abs(assessed.relativePositionRtnM[k] - written)).toBeLessThan(0.002);
    });
    const { collisionProbability = Number.NaN, collisionProbabilityMax = Number.NaN } = assessed;
    expect(collisionProbability / Number(row.collision_probability_foster)).toBeCloseTo(1, 4);
    expect(collisionProbabilityMax / Number(row.collision_probability_max)).toBeCloseTo(1, 4);
    expect(assessed.mahalanobisDistance).toBeCloseTo(Number(row.mahalanobis_distance), 3);
  }
});
