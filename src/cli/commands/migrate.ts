/** `windrow migrate`: brings the schema of the store up to date. */
import type { Command } from 'commander';
import { openStore, storeText } from '../compose.js';
import { EXIT, type Io } from '../context.js';
import { storeOption, verb } from '../options.js';
import { print } from '../print.js';
import { runVerb } from '../run-verb.js';

export function migrateCommand(program: Command, io: Io): void {
  storeOption(verb(program, 'migrate', 'bring the schema of the store up to date; safe to run at any time')).action(
    runVerb<[], object>(io, {}, async (context) => {
      const store = await openStore(context);
      await store.migrate();
      const where = storeText(context.settings);
      await print(context, {
        table: () => `The schema of ${where} is up to date.`,
        json: () => ({ store: where, schema: 'up to date' }),
        csv: () => ({ columns: ['store', 'schema'], rows: [{ store: where, schema: 'up to date' }] }),
      });
      return EXIT.done;
    }),
  );
}
