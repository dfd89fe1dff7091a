/** `windrow resume NAME`: computes what is missing of a sweep that the store knows; its file is not needed. */
import type { Command } from 'commander';
import { resumeSweep } from '../../coordinator/resume-sweep.js';
import { openStore } from '../compose.js';
import type { Io } from '../context.js';
import { computeOptions, storeOption, verb } from '../options.js';
import { runVerb } from '../run-verb.js';
import { finish, type RunOptions, runWith } from '../run-and-report.js';

export function resumeCommand(program: Command, io: Io): void {
  const command = verb(program, 'resume', 'compute what is missing of a stored sweep')
    .argument('<name>', 'name of the sweep')
    .option('--retry-failed', 'try points again that were set aside as failed')
    .option('--report <folder>', 'afterwards show phase diagram and boundary, and write figures there');
  storeOption(computeOptions(command)).action(
    runVerb<[string], RunOptions>(io, { drains: true }, async (context, options, name) => {
      const store = await openStore(context);
      const summary = await runWith(context, store, options, (run) => resumeSweep(name, run));
      return finish(context, store, summary, options);
    }),
  );
}
