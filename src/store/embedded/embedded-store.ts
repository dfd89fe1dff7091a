/**
 * The result store of one machine: PostgreSQL in a folder, without anything to install or set up.
 *
 * The folder (the setting `store`; `.windrow/store` below the current folder when absent) belongs to the project that is worked on:
 * results lie beside the sweep files they come from, two projects never mix, and deleting the folder deletes everything. Exception:
 * run as root below a folder others cannot enter, the data lie in /var/lib/windrow; see data-folder.ts.
 *
 * Any number of processes of one machine may use a folder at once; see embedded-server.ts. A folder on a network file system must be
 * used from one machine only.
 */
import { join } from 'node:path';
import { storeOn } from '../postgres/postgres-store.js';
import type { ResultStore } from '../types.js';
import { EmbeddedServer, type EmbeddedOptions } from './embedded-server.js';

export type { EmbeddedOptions };

/** Where the store lies when nothing else is said. */
export const defaultStoreFolder = (): string => join(process.cwd(), '.windrow', 'store');

/**
 * Opens the store in a folder, making it where there is none; the schema is brought up to date.
 * @throws store.embedded, store.full, store.locked, store.schema-newer
 */
export async function openEmbeddedStore(options: Partial<EmbeddedOptions> = {}): Promise<ResultStore> {
  const store = await storeOn(new EmbeddedServer({ ...options, folder: options.folder ?? defaultStoreFolder() }));
  try {
    await store.migrate();
    return store;
  } catch (error) {
    await store.close();
    throw error;
  }
}
