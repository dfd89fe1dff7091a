import { describe, expect, it } from 'vitest';
import {
  allowedText,
  parseBytes,
  parseSetting,
  readSettings,
  SETTINGS,
  type SettingDeclaration,
  settingsHelp,
} from '../../../src/core/settings.js';
import { WindrowError } from '../../../src/core/errors.js';

function refusal(action: () => unknown): WindrowError {
  try {
    action();
  } catch (error) {
    if (error instanceof WindrowError) return error;
    throw error;
  }
  throw new Error('nothing was refused');
}

const declarations = Object.entries(SETTINGS) as [keyof typeof SETTINGS, SettingDeclaration][];

describe('settings', () => {
  it('are the defaults where nothing is set; an empty variable is not set', () => {
    const settings = readSettings({ WINDROW_THREADS: '', PATH: '/bin' });
    for (const [name, declaration] of declarations) expect(settings[name]).toBe(declaration.default);
  });

  it('come from the environment, checked', () => {
    const settings = readSettings({
      WINDROW_THREADS: '3',
      WINDROW_MEMORY: '1.5 GiB',
      WINDROW_STORE: 'elsewhere',
      WINDROW_LOG_LEVEL: 'debug',
      DATABASE_URL: 'postgresql://lab@db/results',
    });
    expect(settings).toMatchObject({ threads: 3, memory: 1.5 * 2 ** 30, store: 'elsewhere', log_level: 'debug' });
    expect(settings.database).toBe('postgresql://lab@db/results');
  });

  it.each([
    ['WINDROW_THREADS', '0'],
    ['WINDROW_THREADS', '1.5'],
    ['WINDROW_THREADS', 'all'],
    ['WINDROW_THREADS', '-2'],
    ['WINDROW_MEMORY', '3'],
    ['WINDROW_MEMORY', 'much'],
    ['WINDROW_MEMORY', '-1G'],
    ['WINDROW_LOG_LEVEL', 'loud'],
  ])('refuse %s=%s, saying what was found and what is allowed', (env, text) => {
    const error = refusal(() => readSettings({ [env]: text }));
    const declaration = declarations.find(([, candidate]) => candidate.env === env)?.[1] as SettingDeclaration;
    expect(error).toMatchObject({ code: 'settings.invalid', exit: 2 });
    expect(error.details).toMatchObject({ where: env, found: text, allowed: allowedText(declaration) });
  });

  it('refuse an unknown variable of their own prefix and leave others alone', () => {
    const error = refusal(() => readSettings({ WINDROW_THREAD: '2', OTHER_THREAD: '2' }));
    expect(error).toMatchObject({ code: 'settings.unknown', exit: 2 });
    expect(error.details.found).toBe('WINDROW_THREAD');
    expect(error.details.allowed).toContain('WINDROW_THREADS');
  });

  it('never repeat a URL that is refused: it may hold a password', () => {
    const error = refusal(() => readSettings({ DATABASE_URL: 'mysql://lab:geheim@db/results' }));
    expect(JSON.stringify(error.details) + error.message).not.toContain('geheim');
    expect(error.details.allowed).toContain('postgresql://');
  });

  it('take an option in the place of a variable', () => {
    expect(parseSetting('threads', '4', '--threads')).toBe(4);
    expect(refusal(() => parseSetting('memory', 'x', '--memory')).details.where).toBe('--memory');
  });

  it('have a default within their own bounds, a description, and stand in the help text', () => {
    const help = settingsHelp();
    for (const [name, declaration] of declarations) {
      expect(help).toContain(declaration.env);
      expect(help).toContain(declaration.description);
      if (declaration.default !== null) expect(parseSetting(name, String(declaration.default), 'default')).toBe(declaration.default);
    }
  });
});

describe('sizes of memory', () => {
  it.each([
    ['0', 0],
    ['1048576', 1048576],
    ['512M', 512 * 2 ** 20],
    ['512 MiB', 512 * 2 ** 20],
    ['2g', 2 * 2 ** 30],
    ['1.5kB', 1536],
    ['1T', 2 ** 40],
  ])('%s', (text, bytes) => expect(parseBytes(text)).toBe(bytes));

  it.each(['', 'G', '1 XB', '1e3', '-5M', 'NaN'])('%s is none', (text) => expect(parseBytes(text)).toBeNull());
});
