/**
 * Sweeps by the built command line on servers of the measurement's own, with what they took: the seconds that the sweep itself reports,
 * CPU seconds of each process, and the highest memory of coordinator, workers and Redis. Linux only, for what /proc tells.
 *
 * PostgreSQL syncs every commit here, as in production.
 */
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { setTimeout as sleep } from 'node:timers/promises';
import pg from 'pg';
import { openPostgresStore } from '../../../src/store/postgres/postgres-store.js';
import type { ResultStore } from '../../../src/store/types.js';
import { startCli, type CliProcess } from '../../support/cli.js';
import { openCluster, type SweepFile } from '../../support/cluster.js';
import { ownPostgres, type OwnPostgres } from '../../support/services.js';
import { waitFor } from '../../support/wait-for.js';

export interface Usage {
  /** bytes, highest resident set */
  readonly memory: number;
  /** seconds, user and system */
  readonly cpu: number;
}

export interface MeasuredRun {
  readonly cells: number;
  /** wall clock, from the registration of the sweep to its last stored cell */
  readonly seconds: number;
  readonly coordinator: Usage;
  readonly workers: readonly Usage[];
  /** bytes, highest `used_memory`, and commands answered; null without Redis */
  readonly redis: { readonly memory: number; readonly commands: number; readonly cpu: number } | null;
  /** CPU seconds of PostgreSQL's sessions and background processes */
  readonly database: { readonly cpu: number; readonly bytes: number };
}

export interface Measure {
  /** One process with threads, in a new database: every run computes everything. */
  alone(file: SweepFile, threads: number): Promise<MeasuredRun>;
  /** A new cluster with workers of one thread. */
  cluster(file: SweepFile, workers: number): Promise<MeasuredRun>;
  database(): Promise<{ readonly url: string; open(): Promise<ResultStore> }>;
  close(): Promise<void>;
}

const PRINTED = ['--format', 'json'];
const TICKS = 100;
const LOOK_MS = 100;

/** What /proc tells of a process while it lives. */
function usage(pid: number): Usage | null {
  try {
    const fields = readFileSync(`/proc/${pid}/stat`, 'utf8').split(') ')[1].split(' ');
    const peak = /VmHWM:\s+(\d+) kB/.exec(readFileSync(`/proc/${pid}/status`, 'utf8'));
    return peak === null ? null : { memory: 1024 * Number(peak[1]), cpu: (Number(fields[11]) + Number(fields[12])) / TICKS };
  } catch {
    return null;
  }
}

/** Follows processes until told to stop; a process that has ended keeps what was last seen of it. */
function follow(pids: readonly number[]): () => Promise<Usage[]> {
  const latest = new Map<number, Usage>();
  let going = true;
  const look = (): void => {
    for (const pid of pids) {
      const seen = usage(pid);
      if (seen !== null) latest.set(pid, seen);
    }
  };
  const looking = (async () => {
    while (going) {
      look();
      await sleep(LOOK_MS);
    }
  })();
  return async () => {
    going = false;
    await looking;
    look();
    return pids.map((pid) => latest.get(pid) ?? { memory: NaN, cpu: NaN });
  };
}

/** CPU seconds of the server with all its children, ended ones included. */
function serverCpu(postmaster: number): number {
  const children = readFileSync(`/proc/${postmaster}/task/${postmaster}/children`, 'utf8').trim().split(' ').filter(Boolean);
  const stat = readFileSync(`/proc/${postmaster}/stat`, 'utf8').split(') ')[1].split(' ');
  const own = [11, 12, 13, 14].reduce((sum, field) => sum + Number(stat[field]), 0) / TICKS;
  return children.reduce((sum, pid) => sum + (usage(Number(pid))?.cpu ?? 0), own);
}

async function ask<Row extends pg.QueryResultRow>(url: string, text: string): Promise<Row[]> {
  const client = new pg.Client({ connectionString: url });
  await client.connect();
  try {
    return (await client.query<Row>(text)).rows;
  } finally {
    await client.end();
  }
}

async function postmasterOf(server: OwnPostgres): Promise<number> {
  const [{ folder }] = await ask<{ folder: string }>(server.url, `select current_setting('data_directory') as folder`);
  return Number(readFileSync(`${folder}/postmaster.pid`, 'utf8').split('\n')[0]);
}

/** Waits for a command that prints its result as JSON. */
async function summaryOf(process: CliProcess): Promise<{ cells: number; seconds: number }> {
  const status = await process.end;
  if (status !== 0) throw new Error(`the sweep ended with ${status}: ${process.stderr()}`);
  const { cells, seconds } = JSON.parse(process.stdout()) as { cells: number; seconds: number };
  return { cells, seconds };
}

export async function openMeasure(): Promise<Measure> {
  const server = await ownPostgres({ settings: { fsync: 'on' } });
  const postmaster = await postmasterOf(server);
  let made = 0;
  const database = async (): Promise<{ url: string; open(): Promise<ResultStore> }> => {
    const name = `measured_${++made}`;
    await ask(server.url, `create database ${name}`);
    const url = new URL(server.url);
    url.pathname = `/${name}`;
    return {
      url: url.href,
      async open() {
        const store = await openPostgresStore({ url: url.href });
        await store.migrate();
        return store;
      },
    };
  };

  const databaseOf = async (url: string, before: number): Promise<MeasuredRun['database']> => {
    const [{ bytes }] = await ask<{ bytes: number }>(url, 'select pg_database_size(current_database())::float8 as bytes');
    return { cpu: serverCpu(postmaster) - before, bytes };
  };

  return {
    database,
    async alone(file, threads) {
      const own = await database();
      await (await own.open()).close();
      const folder = mkdtempSync(join(tmpdir(), 'windrow-measure-'));
      try {
        const path = join(folder, 'sweep.json');
        writeFileSync(path, JSON.stringify(file));
        await ask(own.url, 'checkpoint');
        const before = serverCpu(postmaster);
        const sweep = startCli(['sweep', path, ...PRINTED, '--threads', String(threads)], { DATABASE_URL: own.url, WINDROW_MEMORY: '1G' });
        const stop = follow([sweep.pid]);
        const summary = await summaryOf(sweep);
        const [coordinator] = await stop();
        return { ...summary, coordinator, workers: [], redis: null, database: await databaseOf(own.url, before) };
      } finally {
        rmSync(folder, { recursive: true, force: true });
      }
    },
    async cluster(file, workers) {
      const own = await database();
      const cluster = await openCluster({}, own);
      if (cluster === null) throw new Error('a cluster is measured with a Redis of its own');
      try {
        const started = Array.from({ length: workers }, () => cluster.worker([], { WINDROW_LOG_LEVEL: 'warn' }));
        await waitFor(() => started.every((worker) => worker.stderr().includes('worker on')), 'workers');
        await ask(own.url, 'checkpoint');
        const before = serverCpu(postmaster);
        const idle = started.map(({ pid }) => usage(pid)!.cpu);
        const sweep = cluster.sweep(file, PRINTED);
        const stop = follow([sweep.pid, cluster.redis.process().pid!, ...started.map(({ pid }) => pid)]);
        const summary = await summaryOf(sweep);
        const [coordinator, redis, ...used] = await stop();
        const info = await cluster.client.info();
        const said = (key: string): number => Number(new RegExp(`^${key}:(\\d+)`, 'm').exec(info)?.[1]);
        return {
          ...summary,
          coordinator,
          workers: used.map(({ memory, cpu }, index) => ({ memory, cpu: cpu - idle[index] })),
          redis: { memory: said('used_memory_peak'), commands: said('total_commands_processed'), cpu: redis.cpu },
          database: await databaseOf(own.url, before),
        };
      } finally {
        await cluster.calm();
        await cluster.close();
      }
    },
    close: () => server.stop(),
  };
}

export const median = (values: readonly number[]): number => [...values].sort((a, b) => a - b)[Math.floor(values.length / 2)];

/** A line of the account of a run. */
export function account(what: string, { cells, seconds, coordinator, workers, redis, database }: MeasuredRun): string {
  const mega = (bytes: number): string => `${(bytes / 2 ** 20).toFixed(1)} MiB`;
  const each = workers.map(({ cpu, memory }) => `${cpu.toFixed(1)} s CPU, ${mega(memory)}`).join('; ');
  const parts = [
    `${what}: ${cells} cells in ${seconds.toFixed(1)} s, ${(cells / seconds).toFixed(0)} cells/s`,
    `sweep ${coordinator.cpu.toFixed(1)} s CPU, ${mega(coordinator.memory)}`,
    ...(workers.length > 0 ? [`workers ${each}`] : []),
    ...(redis === null ? [] : [`Redis ${redis.cpu.toFixed(1)} s CPU, ${mega(redis.memory)}, ${redis.commands} commands`]),
    `PostgreSQL ${database.cpu.toFixed(1)} s CPU, ${(database.bytes / cells).toFixed(0)} bytes a cell`,
  ];
  return parts.join('\n    ');
}

/** CPU seconds of all processes of a run: what a busy machine distorts least. */
export const allCpu = ({ coordinator, workers, redis, database }: MeasuredRun): number =>
  coordinator.cpu + workers.reduce((sum, { cpu }) => sum + cpu, 0) + (redis?.cpu ?? 0) + database.cpu;
