/** `windrow migrate`: brings the schema of the store up to date; with `--grant` also makes its roles. */
import type { Command } from 'commander';
import { WindrowError } from '../../core/errors.js';
import { openStore, storeText } from '../compose.js';
import { EXIT, type Io } from '../context.js';
import { storeOption, verb } from '../options.js';
import { print } from '../print.js';
import { runVerb } from '../run-verb.js';

interface Options {
  readonly grant?: boolean;
}

export function migrateCommand(program: Command, io: Io): void {
  const command = verb(program, 'migrate', 'bring the schema of the store up to date; safe to run at any time').option(
    '--grant',
    'also make the roles windrow_writer and windrow_reader, for logins that compute and that only read',
  );
  storeOption(command).action(
    runVerb<[], Options>(io, {}, async (context, { grant = false }) => {
      if (grant && context.settings.database === null) {
        throw new WindrowError('settings.invalid', 'roles belong to a database server; the embedded store has one user', {
          where: 'DATABASE_URL',
          found: 'not set',
        });
      }
      const store = await openStore(context);
      await store.migrate();
      const roles = grant ? await store.grant() : null;
      const where = storeText(context.settings);
      const row = { store: where, schema: 'up to date', ...roles };
      await print(context, {
        table: () =>
          roles === null
            ? `The schema of ${where} is up to date.`
            : `The schema of ${where} is up to date. Role ${roles.writer} may compute, ${roles.reader} may read; put logins into them:\n` +
              `  create role NAME login in role ${roles.reader};`,
        json: () => row,
        csv: () => ({ columns: Object.keys(row), rows: [row] }),
      });
      return EXIT.done;
    }),
  );
}
