/** `windrow stop NAME`: asks the processes that run a sweep to finish what they have and to start nothing new. */
import type { Command } from 'commander';
import { sweepLock } from '../../coordinator/run-sweep.js';
import { openStore } from '../compose.js';
import { EXIT, type Io } from '../context.js';
import { storeOption, verb } from '../options.js';
import { print } from '../print.js';
import { runVerb } from '../run-verb.js';
import { findStoredSweep } from '../stored-sweep.js';

export function stopCommand(program: Command, io: Io): void {
  const command = verb(program, 'stop', 'ask a running sweep to stop after what it is computing').argument('<name>', 'name of the sweep');
  storeOption(command).action(
    runVerb<[string], object>(io, {}, async (context, _options, name) => {
      const store = await openStore(context);
      const { state } = await findStoredSweep(store, name);
      // Whoever runs a sweep holds its lock; a sweep that nobody runs must not be left in the state 'stopping'. In a cluster an open
      // sweep is carried on by the next worker that sees it, so there it is never idle.
      const unattended = (await store.withLock(sweepLock(name), () => Promise.resolve(true))) === true;
      const idle = unattended && (context.settings.redis === null || state !== 'open');
      if (!idle) await store.setSweepState(name, 'stopping');
      const row = { sweep: name, running: !idle, state: idle ? state : 'stopping' };
      await print(context, {
        table: () =>
          idle
            ? `Sweep ${name} is not running.`
            : `Sweep ${name} is asked to stop; what runs is finished first. \`windrow resume ${name}\` goes on.`,
        json: () => row,
        csv: () => ({ columns: Object.keys(row), rows: [row] }),
      });
      return EXIT.done;
    }),
  );
}
