/**
 * Runs a command: settings, log, interrupts, errors, exit status.
 *
 * The first SIGINT or SIGTERM asks a command that can drain to finish what runs and to start nothing new; a second one, or the first
 * one for a command that only reads, closes what is open and ends the process with status 130. A reader of stdout that goes away
 * (EPIPE) ends the command quietly: it has what it wanted.
 */
import type { Command } from 'commander';
import { createLog } from '../core/log.js';
import { parseSetting, readSettings, type SettingName, type Settings } from '../core/settings.js';
import { type Context, EXIT, type ExitStatus, type Format, type Io, say } from './context.js';
import { errorText, exitOf, TOLD } from './report-error.js';

/** Options of the command line that override a setting of the same name. */
const OVERRIDES = ['store', 'threads', 'memory', 'lanes', 'grace'] as const satisfies readonly SettingName[];

type CommonOptions = { readonly format?: Format } & { readonly [name in (typeof OVERRIDES)[number]]?: string };

export type Action<Arguments extends readonly unknown[], Options> = (
  context: Context,
  options: Options,
  ...args: Arguments
) => Promise<ExitStatus> | ExitStatus;

export interface VerbTraits {
  /** The first interrupt aborts `context.signal` instead of ending the process. */
  readonly drains?: boolean;
  /** Format when none is asked for. */
  readonly format?: Format;
}

/** How long things may take to close when the process is to end at once. */
const CLOSE_MS = 5_000;

function settingsOf(io: Io, options: CommonOptions): Settings {
  const given = OVERRIDES.flatMap((name) => {
    const text = options[name];
    return text === undefined ? [] : [[name, parseSetting(name, text, `--${name}`)] as const];
  });
  return { ...readSettings(io.environment), ...Object.fromEntries(given) };
}

async function closeAll(closers: Context['closers']): Promise<void> {
  while (closers.length > 0) await closers.pop()?.();
}

function isBrokenPipe(error: unknown): boolean {
  const code = (error as NodeJS.ErrnoException | null)?.code;
  return code === 'EPIPE' || code === 'ERR_STREAM_DESTROYED' || code === 'ERR_STREAM_PREMATURE_CLOSE';
}

/** Turns an action into what commander calls; the status goes to `process.exitCode`. */
export function runVerb<Arguments extends readonly unknown[], Options extends object>(
  io: Io,
  traits: VerbTraits,
  action: Action<Arguments, Options>,
): (...args: unknown[]) => Promise<void> {
  return async (...all) => {
    const command = all.at(-1) as Command;
    const options = command.opts<CommonOptions & Options>();
    const args = all.slice(0, -2) as unknown as Arguments;
    const format = options.format ?? traits.format ?? 'table';
    const abort = new AbortController();
    const closers: Context['closers'] = [];
    let interrupts = 0;
    let ending = false;
    const interrupt = (): void => {
      interrupts++;
      if (interrupts === 1 && traits.drains === true) {
        abort.abort();
        say(io, 'windrow: finishing what runs; interrupt again to stop at once');
        return;
      }
      ending = true;
      setTimeout(() => process.exit(EXIT.interrupted), CLOSE_MS).unref();
      void closeAll(closers).finally(() => process.exit(EXIT.interrupted));
    };
    process.on('SIGINT', interrupt);
    process.on('SIGTERM', interrupt);
    try {
      const settings = settingsOf(io, options);
      const log = createLog({ level: settings.log_level, terminal: io.err.isTTY === true });
      process.exitCode = await action({ ...io, settings, format, log, signal: abort.signal, closers }, options, ...args);
    } catch (error) {
      // What was closed under the command's hands is no news to who interrupted it.
      if (ending) return;
      // Output that cannot be written has been told where the stream is watched.
      if (isBrokenPipe(error) || (error instanceof Error && TOLD.has(error))) return;
      io.err.write(`${errorText(error, format)}\n`);
      process.exitCode = exitOf(error);
    } finally {
      await closeAll(closers).catch((error: unknown) => {
        io.err.write(`${errorText(error, format)}\n`);
        process.exitCode ||= exitOf(error);
      });
      process.off('SIGINT', interrupt);
      process.off('SIGTERM', interrupt);
    }
  };
}
