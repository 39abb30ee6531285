import { type DestinationStream, pino, stdTimeFunctions } from 'pino';
import { prettyFactory } from 'pino-pretty';

type LogFormat = 'text' | 'json';

type LogFields = Readonly<Record<string, unknown>>;

/** What a job tells about its own course, apart from its results. */
export type Log = {
  readonly info: (message: string, fields?: LogFields) => void;
  readonly warn: (message: string, fields?: LogFields) => void;
  readonly error: (message: string, fields?: LogFields) => void;
};

type LogSettings = {
  readonly format: LogFormat;
  /** Takes each finished line with its newline. */
  readonly write: (line: string) => void;
  /** Colors the level word; only for `text`. */
  readonly color: boolean;
  readonly nowMs?: () => number;
};

/**
 * A log on pino. `text` gives one readable line an event, on a terminal and in a file alike, so that a
 * cron mail can be read; `json` gives one JSON object a line with `level`, `time`, `message` and the fields.
 *
 * Lines are written before the call returns: what a killed process said is not lost in a buffer.
 */
export function createLog(settings: LogSettings): Log {
  const logger = pino(
    {
      base: null,
      messageKey: 'message',
      timestamp: settings.nowMs === undefined ? stdTimeFunctions.isoTime : fixedTime(settings.nowMs),
      formatters: { level: (label) => ({ level: label }) },
    },
    destination(settings),
  );
  return {
    info: (message, fields = {}) => logger.info(fields, message),
    warn: (message, fields = {}) => logger.warn(fields, message),
    error: (message, fields = {}) => logger.error(fields, message),
  };
}

/** Whether text on this stream may carry color: only a terminal, and never against NO_COLOR (no-color.org). */
export function mayColor(
  stream: { readonly isTTY?: boolean },
  environment: Readonly<Record<string, string | undefined>>,
): boolean {
  return stream.isTTY === true && !environment.NO_COLOR && environment.TERM !== 'dumb';
}

function destination(settings: LogSettings): DestinationStream {
  if (settings.format === 'json') return { write: settings.write };
  const readable = prettyFactory({
    colorize: settings.color,
    messageKey: 'message',
    translateTime: "UTC:yyyy-mm-dd'T'HH:MM:ss'Z'",
    singleLine: true,
  });
  return { write: (line) => settings.write(readable(line)) };
}

function fixedTime(nowMs: () => number): () => string {
  return () => `,"time":"${new Date(nowMs()).toISOString()}"`;
}
