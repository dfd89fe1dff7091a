/**
 * Brings the schema `windrow` of a database up to date: numbered forward-only SQL files, run by node-pg-migrate.
 *
 * Guarantees: all pending files run in one transaction, so a failure leaves the schema as it was; any number of processes may migrate
 * at once, since each waits for the advisory lock and then finds nothing left to do. Which files have run is recorded by name in
 * `windrow.migration`.
 *
 * A file whose name ends in `.breaking.sql` changes what older programs rely on; a program that finds such a name recorded which it
 * does not have refuses the store. Other unknown names are additions an older program can ignore.
 */
import { existsSync, readdirSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import type { ClientBase } from 'pg';
import pg from 'pg';
import { WindrowError } from '../core/errors.js';

const SCHEMA = 'windrow';
const TABLE = 'migration';
/** Of the advisory lock: any number that other programs in the database do not use. */
const LOCK = 7_460_913_582_201;

export interface SchemaState {
  /** files of this program that have not run */
  readonly pending: readonly string[];
  /** breaking files that have run and that this program does not have */
  readonly newer: readonly string[];
}

/** The folder of SQL files, beside `src` in a source tree and beside `dist` in a build. */
function migrationsFolder(): string {
  const folders = ['../../migrations/', '../../../migrations/'].map((path) => fileURLToPath(new URL(path, import.meta.url)));
  const found = folders.find((folder) => existsSync(folder));
  if (found === undefined)
    throw new WindrowError('internal.invariant', 'the folder of migrations is missing', { where: folders[folders.length - 1] });
  return found;
}

export async function schemaState(client: ClientBase, folder = migrationsFolder()): Promise<SchemaState> {
  const own = readdirSync(folder)
    .filter((file) => file.endsWith('.sql'))
    .map((file) => file.slice(0, -'.sql'.length))
    .sort();
  const table = await client.query<{ present: boolean }>('select to_regclass($1) is not null as present', [`${SCHEMA}.${TABLE}`]);
  if (!table.rows[0].present) return { pending: own, newer: [] };
  const { rows } = await client.query<{ name: string }>(`select name from ${SCHEMA}.${TABLE}`);
  const run = new Set(rows.map(({ name }) => name));
  return {
    pending: own.filter((name) => !run.has(name)),
    newer: [...run].filter((name) => name.endsWith('.breaking') && !own.includes(name)).sort(),
  };
}

/** @throws store.schema-newer */
export function refuseNewer({ newer }: SchemaState, where: string): void {
  if (newer.length === 0) return;
  throw new WindrowError('store.schema-newer', 'the store was changed by a newer windrow; use that version', {
    where,
    found: newer.join(', '),
  });
}

/**
 * @param client an own connection; its search_path is reset
 * @param where the server, for messages
 * @throws store.schema-newer, store.schema-older when a file fails, and errors of the connection
 */
export async function migrate(client: ClientBase, where: string, folder = migrationsFolder()): Promise<void> {
  const state = await schemaState(client, folder);
  refuseNewer(state, where);
  if (state.pending.length === 0) return;
  // Loaded here only: most starts find nothing to migrate.
  const { runner } = await import('node-pg-migrate');
  // 'create schema if not exists' needs the right to create even where the schema exists.
  const schema = await client.query<{ present: boolean }>('select to_regnamespace($1) is not null as present', [SCHEMA]);
  try {
    await runner({
      dbClient: client,
      dir: folder,
      direction: 'up',
      schema: SCHEMA,
      createSchema: !schema.rows[0].present,
      migrationsTable: TABLE,
      singleTransaction: true,
      advisoryLockMode: 'wait',
      lockValue: LOCK,
      log: () => undefined,
    });
    await client.query('reset search_path');
  } catch (error) {
    if (error instanceof pg.DatabaseError) throw error;
    const cause = error instanceof Error ? error : new Error(String(error));
    throw new WindrowError('store.schema-older', 'the migrations of the store cannot be run', { where, found: cause.message, cause });
  }
}
