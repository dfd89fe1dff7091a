/**
 * The composition root: the one place that chooses adapters. With DATABASE_URL results live in that PostgreSQL, otherwise in the
 * embedded store of a folder; jobs run on threads of this process.
 */
import { availableParallelism, totalmem } from 'node:os';
import { resolve } from 'node:path';
import { fileURLToPath } from 'node:url';
import type { Settings } from '../core/settings.js';
import { openComputePool } from '../queue/compute-pool.js';
import { openInProcessQueue } from '../queue/in-process/in-process-queue.js';
import type { ComputePool, JobQueue } from '../queue/types.js';
import { openEmbeddedStore } from '../store/embedded/embedded-store.js';
import { openPostgresStore } from '../store/postgres/postgres-store.js';
import type { ResultStore } from '../store/types.js';
import type { Context } from './context.js';

/** Where results live, in words. */
export function storeText({ database, store }: Settings): string {
  return database === null ? `the store in ${resolve(store)}` : 'the database of DATABASE_URL';
}

/** Opens the store and closes it with the command. The embedded one is made, and its schema brought up to date, where needed. */
export async function openStore({ settings, closers }: Context): Promise<ResultStore> {
  const store =
    settings.database === null
      ? await openEmbeddedStore({ folder: resolve(settings.store) })
      : await openPostgresStore({ url: settings.database });
  closers.push(() => store.close());
  return store;
}

export function threadCount({ threads }: Settings): number {
  return threads ?? availableParallelism();
}

/** Bytes one evaluation may use: half of what the machine (or the container) has, shared by the threads, unless set. */
export function memoryLimit(settings: Settings): number {
  if (settings.memory !== null) return settings.memory;
  const constrained = process.constrainedMemory();
  const available = constrained > 0 ? Math.min(constrained, totalmem()) : totalmem();
  return Math.floor(available / 2 / threadCount(settings));
}

/** Threads that compute and the queue they take jobs from; both end with the command. */
export function openWorkers({ settings, closers }: Context): { readonly queue: JobQueue; readonly pool: ComputePool } {
  const pool = openComputePool({
    entry: fileURLToPath(new URL('../../workers/compute.js', import.meta.url)),
    threads: threadCount(settings),
  });
  const queue = openInProcessQueue();
  closers.push(() => pool.close());
  closers.push(() => queue.close());
  return { queue, pool };
}
