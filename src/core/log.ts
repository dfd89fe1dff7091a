/**
 * The log: JSON lines on stderr, so that data on stdout stays clean. Passwords never get into it.
 *
 * Writing is synchronous: entries keep their order with other output, and the last ones before a crash are there.
 */
import pino, { type Logger } from 'pino';

export type Log = Logger;

export interface LogOptions {
  /** null: warn on a terminal, info otherwise */
  readonly level: string | null;
  readonly terminal: boolean;
  /** Where lines go; stderr when absent. */
  readonly destination?: { write(line: string): void };
}

const HIDDEN = '[hidden]';
const SECRET_KEYS = ['password', 'token', 'secret', 'authorization', 'database', 'redis', 'url', 'connectionString'];

/** A text with the password of every URL in it hidden. */
export function hidePasswords(text: string): string {
  return text.replace(/([a-z][a-z0-9+.-]*:\/\/[^\s:/@]*):[^\s/]*@/gi, `$1:${HIDDEN}@`);
}

export function createLog({ level, terminal, destination }: LogOptions): Log {
  return pino(
    {
      level: level ?? (terminal ? 'warn' : 'info'),
      base: null,
      timestamp: pino.stdTimeFunctions.isoTime,
      formatters: { level: (label) => ({ level: label }) },
      redact: { paths: SECRET_KEYS.flatMap((key) => [key, `*.${key}`]), censor: HIDDEN },
      hooks: { streamWrite: hidePasswords },
    },
    destination ?? pino.destination({ fd: 2, sync: true }),
  );
}
