import { terminalText } from '../tables/terminal-text.js';

type PlainSetting = number | string | boolean | readonly number[] | null;
type FileSetting = { readonly file: string; readonly sha256: string | undefined };

/** A setting of a run; `null` where it was not given. A count of files is a number. */
type Setting = PlainSetting | FileSetting;

/**
 * What decides, beside the element sets themselves, which encounters a run lists and how probable they are: by
 * name, in the order in which they are told.
 */
export type RunSettings = ReadonlyMap<string, Setting>;

/** One setting that two runs do not share. */
export type ChangedSetting = {
  /** An option without its dashes, or `version`, that of the program. */
  readonly setting: string;
  readonly previous: Setting;
  readonly current: Setting;
};

/** Options by their values; those of the volume take each other's place, and one that is not given is `null`. */
const PLAIN = ['all-on-all', 'within-fleet', 'days', 'miss-km', 'volume-rtn-km', 'volume-shape'] as const;
/** Options by what their file holds: a name may stay while its contents change, and the other way around. */
const FILES = ['objects', 'sigma'] as const;
/** Options by how many files they name: names and contents of element sets differ every night. */
const COUNTED = ['fleet', 'catalog'] as const;

/**
 * Takes the settings out of the record of a run, as `run.json` holds it.
 *
 * @returns `undefined` for what is no such record
 */
export function settingsOf(record: unknown): RunSettings | undefined {
  const { version, options, inputs } = (record ?? {}) as {
    version?: unknown;
    options?: Readonly<Record<string, unknown>> | null;
    inputs?: { others?: unknown } | null;
  };
  const others = inputs?.others;
  if (typeof version !== 'string' || typeof options !== 'object' || options === null) return undefined;
  if (!Array.isArray(others)) return undefined;
  const digestOf = (file: string): string | undefined =>
    (others as (Partial<FileSetting> | null)[]).find((other) => other?.file === file)?.sha256;
  const settings = new Map<string, Setting>([['version', version]]);
  for (const name of COUNTED) {
    const paths = options[name];
    settings.set(name, Array.isArray(paths) ? paths.length : null);
  }
  for (const name of PLAIN) settings.set(name, (options[name] ?? null) as PlainSetting);
  for (const name of FILES) {
    const file = options[name];
    settings.set(name, typeof file === 'string' ? { file, sha256: digestOf(file) } : null);
  }
  return settings;
}

/** The settings in which two runs differ. */
export function changedSettings(previous: RunSettings, current: RunSettings): ChangedSetting[] {
  return [...current].flatMap(([setting, now]) => {
    const before = previous.get(setting) ?? null;
    return essence(before) === essence(now) ? [] : [{ setting, previous: before, current: now }];
  });
}

/**
 * What the summary on the terminal says of them below the changes; nothing where both runs share all settings.
 *
 * @param changed `undefined` where those of the other run are not known
 */
export function changedSettingsLines(changed: readonly ChangedSetting[] | undefined): string[] {
  if (changed === undefined) {
    return ['The settings of that run are not known: changes may come from other settings alone.'];
  }
  if (changed.length === 0) return [];
  return [
    'That run had other settings, so changes may come from these alone:',
    ...changedSettingsTexts(changed).map((text) => `  ${text}`),
  ];
}

/** Each changed setting in words, such as `--miss-km: 5 then, 10 now`. */
export function changedSettingsTexts(changed: readonly ChangedSetting[]): string[] {
  return changed.map(({ setting, previous, current }) => {
    const name = setting === 'version' ? 'version of wideberth' : `--${setting}`;
    if (isFile(previous) && isFile(current) && previous.file === current.file) {
      return terminalText(`${name}: ${current.file} then and now, but its contents changed`);
    }
    return terminalText(`${name}: ${inWords(setting, previous)} then, ${inWords(setting, current)} now`);
  });
}

function essence(setting: Setting): string {
  return JSON.stringify(isFile(setting) ? [setting.sha256] : setting);
}

function isFile(setting: Setting): setting is FileSetting {
  return typeof setting === 'object' && setting !== null && 'file' in setting;
}

function inWords(name: string, setting: Setting): string {
  if (setting === null) return name === 'sigma' ? 'the built-in table' : 'none';
  if (isFile(setting)) return setting.file;
  if (typeof setting === 'boolean') return setting ? 'on' : 'off';
  if ((COUNTED as readonly string[]).includes(name)) return `${setting} file${setting === 1 ? '' : 's'}`;
  return String(setting);
}
