import { expect, test } from 'vitest';
import { createLog, mayColor } from '../../src/jobs/log.js';

function lines(format: 'text' | 'json', color = false): string[] {
  const written: string[] = [];
  const log = createLog({
    format,
    color,
    write: (line) => written.push(line),
    nowMs: () => Date.UTC(2026, 11, 1, 2, 3, 4, 5),
  });
  log.info('read fleet.tle', { used: 12 });
  log.warn('an old set');
  log.error('no space left');
  return written;
}

test('text is one readable line an event', () => {
  expect(lines('text')).toEqual([
    '[2026-12-01T02:03:04Z] INFO: read fleet.tle {"used":12}\n',
    '[2026-12-01T02:03:04Z] WARN: an old set\n',
    '[2026-12-01T02:03:04Z] ERROR: no space left\n',
  ]);
});

test('json is one object a line', () => {
  expect(lines('json').map((line) => JSON.parse(line))).toEqual([
    { level: 'info', time: '2026-12-01T02:03:04.005Z', used: 12, message: 'read fleet.tle' },
    { level: 'warn', time: '2026-12-01T02:03:04.005Z', message: 'an old set' },
    { level: 'error', time: '2026-12-01T02:03:04.005Z', message: 'no space left' },
  ]);
  expect(lines('json').every((line) => line.endsWith('}\n'))).toBe(true);
});

test('only a terminal gets color, and not against NO_COLOR', () => {
  expect(lines('text', true)[0]).toContain('\u001b[');
  expect(lines('json', true)[0]).not.toContain('\u001b[');
  expect(mayColor({ isTTY: true }, {})).toBe(true);
  expect(mayColor({ isTTY: false }, {})).toBe(false);
  expect(mayColor({}, {})).toBe(false);
  expect(mayColor({ isTTY: true }, { NO_COLOR: '1' })).toBe(false);
  expect(mayColor({ isTTY: true }, { TERM: 'dumb' })).toBe(false);
});
