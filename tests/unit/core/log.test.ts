import { describe, expect, it } from 'vitest';
import { createLog, hidePasswords, type LogOptions } from '../../../src/core/log.js';

function logged(options: Partial<LogOptions>, write: (log: ReturnType<typeof createLog>) => void): Record<string, unknown>[] {
  const lines: string[] = [];
  const log = createLog({ level: null, terminal: false, ...options, destination: { write: (line) => void lines.push(line) } });
  write(log);
  return lines.map((line) => JSON.parse(line) as Record<string, unknown>);
}

describe('the log', () => {
  it('writes JSON lines with an ISO time and a named level', () => {
    const [entry] = logged({}, (log) => log.info({ sweep: 'a' }, 'begun'));
    expect(entry).toMatchObject({ level: 'info', sweep: 'a', msg: 'begun' });
    expect(new Date(entry?.['time'] as string).toISOString()).toBe(entry?.['time']);
  });

  it('is quiet on a terminal, and as talkative as it is told to be', () => {
    const write = (log: ReturnType<typeof createLog>): void => {
      log.info('a');
      log.warn('b');
    };
    expect(logged({ terminal: true }, write)).toHaveLength(1);
    expect(logged({ terminal: false }, write)).toHaveLength(2);
    expect(logged({ terminal: true, level: 'debug' }, write)).toHaveLength(2);
    expect(logged({ level: 'silent' }, write)).toHaveLength(0);
  });

  it('hides passwords by key, in nested objects, in URLs inside messages and in errors', () => {
    const url = 'postgresql://lab:geheim@db:5432/results';
    const entries = logged({}, (log) => {
      log.info({ password: 'geheim', settings: { database: url, token: 'geheim' } }, 'start');
      log.error({ err: new Error(`cannot reach ${url}`) }, `no answer from ${url}`);
    });
    const text = JSON.stringify(entries);
    expect(text).not.toContain('geheim');
    expect(text).toContain('postgresql://lab:[hidden]@db:5432/results');
  });

  it('leaves URLs without passwords alone', () => {
    expect(hidePasswords('see https://example.org/a:b@c and redis://host:6379')).toBe(
      'see https://example.org/a:b@c and redis://host:6379',
    );
    expect(hidePasswords('redis://:geheim@host:6379')).toBe('redis://:[hidden]@host:6379');
  });
});
