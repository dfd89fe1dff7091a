/** What a command works with: where it reads settings from, where it writes, and when to stop. */
import type { Writable } from 'node:stream';
import type { Log } from '../core/log.js';
import type { Settings } from '../core/settings.js';

/** Statuses a process ends with. */
export const EXIT = { done: 0, failed: 1, wrongInput: 2, failedPoints: 3, interrupted: 130 } as const;
export type ExitStatus = (typeof EXIT)[keyof typeof EXIT];

export const FORMATS = ['table', 'json', 'csv'] as const;
export type Format = (typeof FORMATS)[number];

export type Environment = { readonly [name: string]: string | undefined };

/** The process as a command line program sees it. */
export interface Io {
  readonly out: Writable & { readonly isTTY?: boolean; readonly columns?: number };
  readonly err: Writable & { readonly isTTY?: boolean };
  readonly environment: Environment;
}

export interface Context extends Io {
  readonly settings: Settings;
  readonly format: Format;
  readonly log: Log;
  /** Aborted by the first interrupt: finish what runs, start nothing new. */
  readonly signal: AbortSignal;
  /** Run in reverse order when the command ends or is stopped at once. */
  readonly closers: (() => Promise<void>)[];
}

/** A sentence for the person at the terminal; stderr, so that data stays clean. */
export function say(context: Pick<Context, 'err'>, text: string): void {
  context.err.write(`${text}\n`);
}
