/**
 * Settings: what can be set from the environment, declared once with bounds, default, unit and description. Validation, help text and
 * documentation come from this table; options of the command line override it.
 *
 * Precedence: option, environment, default. A variable that begins with WINDROW_ and is not in the table is refused, so that a
 * misspelt one is never silently without effect. An empty variable counts as not set. Nothing is read but what is handed in.
 */
import { WindrowError } from './errors.js';

interface Common {
  readonly env: string;
  readonly description: string;
  /** A long option that overrides the variable, for the help text. */
  readonly option?: string;
  /** Never printed. */
  readonly secret?: boolean;
}

export interface NumberSetting extends Common {
  readonly kind: 'integer' | 'bytes';
  readonly unit: string;
  readonly minimum: number;
  readonly maximum: number;
  /** null: chosen at start, as the description says */
  readonly default: number | null;
}
export interface ChoiceSetting extends Common {
  readonly kind: 'choice';
  readonly choices: readonly string[];
  readonly default: string | null;
}
export interface TextSetting extends Common {
  readonly kind: 'path' | 'url' | 'text';
  /** Schemes of a URL. */
  readonly schemes?: readonly string[];
  /** What a text must match, and that in words. */
  readonly pattern?: RegExp;
  readonly allowed?: string;
  readonly default: string | null;
}
export type SettingDeclaration = NumberSetting | ChoiceSetting | TextSetting;

const MEBI = 2 ** 20;

export const SETTINGS = {
  database: {
    kind: 'url',
    env: 'DATABASE_URL',
    schemes: ['postgres:', 'postgresql:'],
    default: null,
    secret: true,
    description: 'PostgreSQL that holds the results; without it they are kept in an embedded one',
  },
  store: {
    kind: 'path',
    env: 'WINDROW_STORE',
    default: '.windrow/store',
    option: '--store',
    description: 'folder of the embedded store, relative to the working directory',
  },
  threads: {
    kind: 'integer',
    env: 'WINDROW_THREADS',
    unit: 'threads',
    minimum: 1,
    maximum: 1024,
    default: null,
    option: '--threads',
    description: 'compute threads; by default as many as the processors this process may use',
  },
  memory: {
    kind: 'bytes',
    env: 'WINDROW_MEMORY',
    unit: 'bytes',
    minimum: 16 * MEBI,
    maximum: 2 ** 46,
    default: null,
    option: '--memory',
    description: 'memory one evaluation may use; by default half of the machine, shared by the threads',
  },
  redis: {
    kind: 'url',
    env: 'REDIS_URL',
    schemes: ['redis:', 'rediss:'],
    default: null,
    secret: true,
    description: 'Redis that holds the jobs of a cluster; without it jobs run in the process that asks for them',
  },
  redis_ca: {
    kind: 'path',
    env: 'WINDROW_REDIS_CA',
    default: null,
    description: "PEM file of the authority that signed the certificate of Redis, where the system doesn't know it",
  },
  redis_prefix: {
    kind: 'text',
    env: 'WINDROW_REDIS_PREFIX',
    pattern: /^[\w{}.-]{1,100}$/,
    allowed: 'letters, digits, and _ - . { }, at most 100',
    default: 'windrow',
    description: 'begins every key in Redis, so that several clusters can share one',
  },
  lanes: {
    kind: 'text',
    env: 'WINDROW_LANES',
    pattern: /^(small|large)(,(small|large))*$/,
    allowed: 'small, large or small,large',
    default: null,
    option: '--lanes',
    description: 'lanes of jobs a worker serves; by default all that its memory allows',
  },
  lane_small: {
    kind: 'bytes',
    env: 'WINDROW_LANE_SMALL',
    unit: 'bytes',
    minimum: 16 * MEBI,
    maximum: 2 ** 46,
    default: 512 * MEBI,
    description: 'memory an evaluation may use in the small lane; the same for every process of a cluster',
  },
  lane_large: {
    kind: 'bytes',
    env: 'WINDROW_LANE_LARGE',
    unit: 'bytes',
    minimum: 16 * MEBI,
    maximum: 2 ** 46,
    default: 16 * 1024 * MEBI,
    description: 'memory an evaluation may use in the large lane; the same for every process of a cluster',
  },
  grace: {
    kind: 'integer',
    env: 'WINDROW_GRACE',
    unit: 'seconds',
    minimum: 0,
    maximum: 86_400,
    default: 30,
    option: '--grace',
    description: 'seconds a worker that is told to end may take to finish its jobs',
  },
  log_level: {
    kind: 'choice',
    env: 'WINDROW_LOG_LEVEL',
    choices: ['silent', 'error', 'warn', 'info', 'debug', 'trace'],
    default: null,
    description: 'least severe log entries to write; by default warn on a terminal, info otherwise',
  },
} as const satisfies Record<string, SettingDeclaration>;

export type SettingName = keyof typeof SETTINGS;

export interface Settings {
  readonly database: string | null;
  readonly store: string;
  readonly threads: number | null;
  readonly memory: number | null;
  readonly redis: string | null;
  readonly redis_ca: string | null;
  readonly redis_prefix: string;
  readonly lanes: string | null;
  readonly lane_small: number;
  readonly lane_large: number;
  readonly grace: number;
  readonly log_level: string | null;
}

const FACTORS: Readonly<Record<string, number>> = { '': 1, k: 2 ** 10, m: 2 ** 20, g: 2 ** 30, t: 2 ** 40 };

/** '512M', '1.5 GiB', '2g', '1048576' → bytes; null where it is none of these. Powers of 1024, as is common practice for memory. */
export function parseBytes(text: string): number | null {
  const match = /^\s*(\d+(?:\.\d+)?)\s*([kmgt]?)(?:i?b)?\s*$/i.exec(text);
  if (!match) return null;
  const factor = FACTORS[(match[2] ?? '').toLowerCase()] ?? 1;
  return Math.round(Number(match[1]) * factor);
}

const sizeText = (bytes: number): string => (bytes % (1024 * MEBI) === 0 ? `${bytes / (1024 * MEBI)}G` : `${bytes / MEBI}M`);

/** What a setting allows, in words. */
export function allowedText(setting: SettingDeclaration): string {
  switch (setting.kind) {
    case 'integer':
      return `a whole number from ${setting.minimum} to ${setting.maximum}`;
    case 'bytes':
      return `a size such as 512M or 2G, from ${setting.minimum / MEBI}M to ${setting.maximum / 2 ** 40}T`;
    case 'choice':
      return setting.choices.join(', ');
    case 'path':
      return 'a path';
    case 'text':
      return setting.allowed ?? 'a text';
    case 'url':
      return `a URL that begins with ${(setting.schemes ?? []).map((scheme) => `${scheme}//`).join(' or ')}`;
  }
}

function parse(setting: SettingDeclaration, text: string): string | number | null {
  switch (setting.kind) {
    case 'integer':
    case 'bytes': {
      const value = setting.kind === 'bytes' ? parseBytes(text) : /^\s*\d+\s*$/.test(text) ? Number(text) : null;
      return value !== null && value >= setting.minimum && value <= setting.maximum ? value : null;
    }
    case 'choice':
      return setting.choices.includes(text) ? text : null;
    case 'path':
      return text.includes('\0') ? null : text;
    case 'text':
      return (setting.pattern ?? /./).test(text) ? text : null;
    case 'url':
      return URL.canParse(text) && (setting.schemes ?? []).includes(new URL(text).protocol) ? text : null;
  }
}

/**
 * One value, from an option or a variable.
 * @param where how the user gave it, for the message
 * @throws WindrowError `settings.invalid`
 */
export function parseSetting<Name extends SettingName>(name: Name, text: string, where: string): NonNullable<Settings[Name]> {
  const setting: SettingDeclaration = SETTINGS[name];
  const value = parse(setting, text);
  if (value !== null) return value as NonNullable<Settings[Name]>;
  throw new WindrowError('settings.invalid', 'a setting that is not allowed', {
    where,
    // A URL may hold a password.
    found: setting.secret === true ? 'something else (not shown, it may hold a password)' : text,
    allowed: allowedText(setting),
  });
}

type Environment = { readonly [name: string]: string | undefined };

/** @throws WindrowError `settings.unknown`, `settings.invalid` */
export function readSettings(environment: Environment): Settings {
  const entries = Object.entries(SETTINGS) as [SettingName, SettingDeclaration][];
  const known = new Set(entries.map(([, { env }]) => env));
  for (const name of Object.keys(environment)) {
    if (!name.startsWith('WINDROW_') || known.has(name)) continue;
    const allowed = [...known].filter((env) => env.startsWith('WINDROW_')).join(', ');
    throw new WindrowError('settings.unknown', 'an environment variable that windrow does not know', { found: name, allowed });
  }
  return Object.fromEntries(
    entries.map(([name, setting]) => {
      const text = environment[setting.env];
      return [name, text === undefined || text === '' ? setting.default : parseSetting(name, text, setting.env)];
    }),
  ) as unknown as Settings;
}

/** The table as help text, one setting in two lines. */
export function settingsHelp(): string {
  const lines = Object.values(SETTINGS as Record<SettingName, SettingDeclaration>).map((setting) => {
    const value = setting.kind === 'bytes' && setting.default !== null ? sizeText(setting.default) : setting.default;
    const standard = value === null ? '' : ` (default ${value})`;
    const option = setting.option === undefined ? '' : `, or ${setting.option}`;
    return `  ${setting.env}${option}\n      ${setting.description}${standard}; ${allowedText(setting)}`;
  });
  return `Environment:\n${lines.join('\n')}\n  NO_COLOR\n      any value turns colour off`;
}
