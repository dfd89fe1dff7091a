#!/usr/bin/env node
/**
 * The command line. Data goes to stdout, progress and messages to stderr. Exit status: 0 done, 1 failed, 2 wrong input, 3 finished with
 * failed points, 130 interrupted.
 */
import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { Command, CommanderError } from 'commander';
import { WindrowError } from '../core/errors.js';
import { settingsHelp } from '../core/settings.js';
import { boundaryCommand } from './commands/boundary.js';
import { catalogueCommands } from './commands/catalogues.js';
import { compareCommand } from './commands/compare.js';
import { cutCommand } from './commands/cut.js';
import { exportCommand } from './commands/export.js';
import { mapCommand } from './commands/map.js';
import { migrateCommand } from './commands/migrate.js';
import { pointCommand } from './commands/point.js';
import { recheckCommand } from './commands/recheck.js';
import { resumeCommand } from './commands/resume.js';
import { scalingCommand } from './commands/scaling.js';
import { sectorsCommand } from './commands/sectors.js';
import { statusCommand } from './commands/status.js';
import { stopCommand } from './commands/stop.js';
import { sweepCommand } from './commands/sweep.js';
import { traceCommand } from './commands/trace.js';
import { workerCommand } from './commands/worker.js';
import { EXIT, type Io } from './context.js';
import { errorText, TOLD } from './report-error.js';

function version(): string {
  const file = fileURLToPath(new URL('../../../package.json', import.meta.url));
  return (JSON.parse(readFileSync(file, 'utf8')) as { version: string }).version;
}

function buildProgram(io: Io): Command {
  const program = new Command('windrow')
    .description('Maps where a monitored quantum many-body system stops exploring its Hilbert space.')
    .version(version())
    .exitOverride()
    .configureOutput({
      writeOut: (text) => void io.out.write(text),
      // Usage errors are reported below, in one form with all others.
      writeErr: () => undefined,
    })
    .addHelpText(
      'after',
      `\n${settingsHelp()}\n\nExit status: 0 done, 1 failed, 2 wrong input, 3 finished with failed points, 130 interrupted.`,
    );
  // Sub-commands take over these settings when they are made.
  for (const declare of [
    sweepCommand,
    resumeCommand,
    statusCommand,
    stopCommand,
    workerCommand,
    mapCommand,
    cutCommand,
    boundaryCommand,
    scalingCommand,
    traceCommand,
    compareCommand,
    recheckCommand,
    pointCommand,
    sectorsCommand,
    exportCommand,
    catalogueCommands,
    migrateCommand,
  ])
    declare(program, io);
  return program;
}

/** Whether the arguments ask for JSON, for errors that come before they are parsed. */
function asksForJson(args: readonly string[]): boolean {
  return args.some((arg, index) => arg === '--format=json' || (arg === '--format' && args[index + 1] === 'json'));
}

/**
 * A reader that goes away (`| head`) is no error; the command ends as if it had read everything. Output that cannot be written, as to
 * a full disk, is told once, and the command closes what is open and fails.
 */
function watchOutput(io: Io): void {
  for (const stream of [io.out, io.err]) {
    let told = false;
    stream.on('error', (error: NodeJS.ErrnoException) => {
      TOLD.add(error);
      if (error.code === 'EPIPE' || told) return;
      told = true;
      process.once('exit', () => {
        process.exitCode ||= EXIT.failed;
      });
      if (stream === io.err) return;
      const details = { where: 'standard output', found: error.message, allowed: 'a place that can be written' };
      const failed = new WindrowError('report.unwritable', 'the output cannot be written', details);
      io.err.write(`${errorText(failed, 'table')}\n`);
    });
  }
}

async function main(args: readonly string[], io: Io): Promise<void> {
  watchOutput(io);
  const program = buildProgram(io);
  try {
    if (args.length === 0) program.help({ error: true });
    await program.parseAsync([...args], { from: 'user' });
  } catch (error) {
    if (!(error instanceof CommanderError)) throw error;
    if (error.exitCode === 0) return;
    process.exitCode = EXIT.wrongInput;
    if (args.length === 0) {
      io.err.write(program.helpInformation());
      return;
    }
    const message = error.message.replace(/^error: /, '').replaceAll('\n', ' ');
    const usage = new WindrowError('cli.usage', message, { allowed: 'see `windrow --help` or `windrow help VERB`' });
    io.err.write(`${errorText(usage, asksForJson(args) ? 'json' : 'table')}\n`);
  }
}

await main(process.argv.slice(2), { out: process.stdout, err: process.stderr, environment: process.env });
