/**
 * A cluster for tests: a Redis and a database of the test file's own, workers and sweeps as processes of the built command line, and
 * the rows that an undisturbed run of one process makes of the same sweep.
 */
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { Redis } from 'ioredis';
import { runSweep } from '../../src/coordinator/run-sweep.js';
import { openInProcessQueue } from '../../src/queue/in-process/in-process-queue.js';
import { withRetry } from '../../src/core/retry.js';
import { METHOD_VERSION } from '../../src/sweep/identity.js';
import type { CellRow, ResultStore } from '../../src/store/types.js';
import { startCli, type CliProcess } from './cli.js';
import { createDatabase, type TestDatabase } from './database.js';
import { inlinePool } from './inline-pool.js';
import { ownRedis, type OwnRedis, type OwnRedisOptions } from './redis.js';
import { rowsOf, sweepOf } from './sweeps.js';
import { waitFor } from './wait-for.js';

export interface SweepFile {
  readonly name: string;
  readonly [key: string]: unknown;
}

export interface Cluster {
  readonly redis: OwnRedis;
  /** beside the cluster's own connections */
  readonly client: Redis;
  readonly store: ResultStore;
  readonly env: Readonly<Record<string, string>>;
  readonly prefix: string;
  /** @param through a command that runs it, e.g. in another network */
  worker(args?: readonly string[], env?: Readonly<Record<string, string>>, through?: readonly string[]): CliProcess;
  sweep(file: SweepFile, args?: readonly string[]): CliProcess;
  cli(args: readonly string[]): CliProcess;
  storedCells(name: string): Promise<number>;
  /** ids of jobs that workers hold */
  active(): Promise<string[]>;
  untilActive(): Promise<void>;
  untilStored(name: string, cells: number): Promise<void>;
  /** Ends what still runs of the test. */
  calm(): Promise<void>;
  close(): Promise<void>;
}

/**
 * @param database where results go; one of the test run's when absent
 * @returns null, said aloud, where no Redis can be had
 */
export async function openCluster(
  options: OwnRedisOptions = {},
  database?: { readonly url: string; open(): Promise<ResultStore> },
): Promise<Cluster | null> {
  const redis = await ownRedis(options);
  if (redis === null) return null;
  const own: TestDatabase | null = database === undefined ? await createDatabase() : null;
  const held = database ?? own!;
  const store = await held.open();
  const folder = mkdtempSync(join(tmpdir(), 'windrow-cluster-'));
  const client = new Redis(redis.url, { maxRetriesPerRequest: null, retryStrategy: () => 100 });
  client.on('error', () => undefined);
  const { prefix } = redis;
  const env = {
    DATABASE_URL: held.url,
    REDIS_URL: redis.url,
    WINDROW_REDIS_PREFIX: prefix,
    WINDROW_LOG_LEVEL: 'debug',
    WINDROW_MEMORY: '1G',
  };
  const started: CliProcess[] = [];
  const start = (args: readonly string[], more: Readonly<Record<string, string>> = {}, through: readonly string[] = []): CliProcess => {
    const process = startCli(args, { ...env, ...more }, through);
    started.push(process);
    return process;
  };
  const active = async (): Promise<string[]> => client.lrange(`${prefix}:small-${METHOD_VERSION}:active`, 0, -1);
  const storedCells = (name: string): Promise<number> =>
    // The server may have been restarted by the test just now.
    withRetry(async () => ((await store.findSweep(name)) === null ? 0 : (await store.progress(name)).storedCells));
  return {
    redis,
    client,
    store,
    env,
    prefix,
    worker: (args = [], more = {}, through = []) => start(['worker', '--threads', '1', ...args], more, through),
    sweep(file, args = []) {
      const path = join(folder, `${file.name}.json`);
      writeFileSync(path, JSON.stringify(file));
      return start(['sweep', path, ...args]);
    },
    cli: (args) => start(args),
    storedCells,
    active,
    untilActive: () => waitFor(async () => (await active()).length > 0, 'a job at a worker'),
    untilStored: (name, cells) => waitFor(async () => (await storedCells(name)) >= cells, `${String(cells)} stored cells`),
    async calm() {
      const running = started.splice(0).filter((process) => !process.ended());
      for (const process of running) {
        process.kill('SIGCONT');
        process.kill('SIGKILL');
      }
      await Promise.all(running.map((process) => process.end));
    },
    async close() {
      client.disconnect();
      await store.close();
      await own?.drop();
      await redis.stop();
      rmSync(folder, { recursive: true, force: true });
    },
  };
}

const runs = new Map<string, Promise<readonly CellRow[]>>();

/** The rows of an undisturbed run, in a database of its own; made once for sweeps that differ by name only. */
export function undisturbed(file: SweepFile): Promise<readonly CellRow[]> {
  const content = JSON.stringify({ ...file, name: '' });
  const made = runs.get(content) ?? runInOneProcess(file);
  runs.set(content, made);
  return made;
}

async function runInOneProcess(file: SweepFile): Promise<readonly CellRow[]> {
  const database = await createDatabase();
  try {
    const store = await database.open();
    await runSweep({ ...sweepOf(file), store, queue: openInProcessQueue(), pool: inlinePool(), memory: 2 ** 29 });
    return await rowsOf(store, file.name);
  } finally {
    await database.drop();
  }
}

/** Some jobs of some tenths of a second each; sweeps of different tilt share no points. */
export const costlySweep = (name: string, couplings = 40, tilt = 0): SweepFile => ({
  name,
  model: 'bose-hubbard-dimer',
  size: [10, 20, 30],
  coupling: { from: 0.1, to: 3, count: couplings },
  parameters: { tilt },
  prepare: 'all-left',
  schedules: [
    { family: 'exponential', mean: 0.5 },
    { family: 'fixed', interval: 0.37 },
  ],
  budget: 2000,
});

export const cellsOf = (couplings = 40): number => 3 * couplings * 2;
