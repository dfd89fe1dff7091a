/**
 * The composition root: the one place that chooses adapters. With DATABASE_URL results live in that PostgreSQL, otherwise in the
 * embedded store of a folder. With REDIS_URL jobs go to the workers of a cluster, otherwise to threads of this process.
 */
import { readFileSync } from 'node:fs';
import { availableParallelism, totalmem } from 'node:os';
import { resolve } from 'node:path';
import { fileURLToPath } from 'node:url';
import { WindrowError } from '../core/errors.js';
import type { Settings } from '../core/settings.js';
import type { BullMqQueue } from '../queue/bullmq/bullmq-queue.js';
import { openComputePool } from '../queue/compute-pool.js';
import { openInProcessQueue } from '../queue/in-process/in-process-queue.js';
import type { Lane, Lanes } from '../queue/lanes.js';
import type { ComputePool, JobQueue } from '../queue/types.js';
import { openEmbeddedStore } from '../store/embedded/embedded-store.js';
import { openPostgresStore } from '../store/postgres/postgres-store.js';
import type { ResultStore } from '../store/types.js';
import { METHOD_VERSION } from '../sweep/identity.js';
import { type Context, say } from './context.js';

/** Where results live, in words. */
export function storeText({ database, store }: Settings): string {
  return database === null ? `the store in ${resolve(store)}` : 'the database of DATABASE_URL';
}

/** Opens the store and closes it with the command. The embedded one is made, and its schema brought up to date, where needed. */
export async function openStore(context: Context): Promise<ResultStore> {
  const { settings, closers } = context;
  const store =
    settings.database === null
      ? await openEmbeddedStore({ folder: resolve(settings.store), onNotice: (message) => say(context, `windrow: ${message}`) })
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

/** Threads that compute; they end with the command. */
export function openPool({ settings, closers }: Context): ComputePool {
  const pool = openComputePool({
    entry: fileURLToPath(new URL('../../workers/compute.js', import.meta.url)),
    threads: threadCount(settings),
  });
  closers.push(() => pool.close());
  return pool;
}

export interface Workers {
  readonly queue: JobQueue;
  /** threads of this process; null where workers elsewhere compute */
  readonly pool: ComputePool | null;
  readonly window?: number;
}

/**
 * The queue that a sweep's jobs go to: that of the cluster, with the workers that consume it elsewhere (`pool` null), or one of this
 * process with threads that end with the command.
 */
export async function openWorkers(context: Context): Promise<Workers> {
  const { settings, closers } = context;
  if (settings.redis !== null) {
    const queue = await openCluster(context);
    await tellIfAlone(context, queue);
    return { queue, pool: null, window: CLUSTER_WINDOW };
  }
  const queue = openInProcessQueue();
  closers.push(() => queue.close());
  // Opened last, closed first: the queue waits for its jobs, and those end when their threads do.
  const pool = openPool(context);
  return { queue, pool };
}

/** Says when there is nobody to compute what is handed out, and why, where workers of another version are alive. */
export async function tellIfAlone(context: Context, { workers }: BullMqQueue): Promise<void> {
  const versions = (await workers.list()).map(({ methodVersion }) => methodVersion);
  if (versions.includes(METHOD_VERSION)) return;
  const others = versions.length === 0 ? '' : `; those alive compute ${[...new Set(versions)].join(', ')}: update the older side`;
  say(context, `windrow: no worker of method ${METHOD_VERSION} is alive, start one with \`windrow worker\`${others}`);
}

/** The lanes of the cluster. @throws settings.invalid where the large one is not the larger */
export function clusterLanes({ lane_small, lane_large }: Settings): Lanes {
  if (lane_small < lane_large) {
    return [
      { name: 'small', memory: lane_small },
      { name: 'large', memory: lane_large },
    ];
  }
  throw new WindrowError('settings.invalid', 'the large lane must allow more memory than the small one', {
    where: 'WINDROW_LANE_LARGE',
    found: `${lane_large} bytes`,
    allowed: `more than ${lane_small} bytes`,
  });
}

/** Jobs of a sweep that wait and run at once: seconds of work for hundreds of threads, tens of megabytes in Redis at most. */
export const CLUSTER_WINDOW = 1000;

/**
 * The queue of the cluster; closed with the command.
 * @param consumed lanes that this process takes jobs from
 * @throws settings.invalid without a database that all hosts reach, queue.unreachable, queue.refused
 */
export async function openCluster(context: Context, consumed?: readonly Lane[]): Promise<BullMqQueue> {
  const { settings, closers, log } = context;
  const { redis, redis_ca } = settings;
  if (redis === null || settings.database === null) {
    throw new WindrowError('settings.invalid', 'a cluster needs a database and a queue that all its hosts reach', {
      where: redis === null ? 'REDIS_URL' : 'DATABASE_URL',
      found: 'not set',
    });
  }
  // Loaded where it is needed: it would double the start of every other command.
  const { openBullMqQueue } = await import('../queue/bullmq/bullmq-queue.js');
  const queue = await openBullMqQueue({
    url: redis,
    prefix: settings.redis_prefix,
    lanes: clusterLanes(settings),
    onWarning: (text) => {
      log.warn(text);
      say(context, `windrow: ${text}`);
    },
    ...(consumed === undefined ? {} : { consumed }),
    ...(redis_ca === null ? {} : { ca: readCertificate(redis_ca) }),
  });
  closers.push(() => queue.close());
  return queue;
}

function readCertificate(path: string): string {
  try {
    return readFileSync(path, 'utf8');
  } catch (cause) {
    throw new WindrowError('settings.invalid', 'the certificate of Redis cannot be read', {
      where: 'WINDROW_REDIS_CA',
      found: path,
      cause,
    });
  }
}
