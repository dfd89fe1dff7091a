/**
 * Faults between a cluster and its servers: PostgreSQL killed and restarted in mid-write, every job delivered twice, and (as root) a
 * network that is cut. The rows at the end are those of a run that nothing disturbed.
 */
import { spawnSync } from 'node:child_process';
import { afterAll, afterEach, beforeAll, describe, expect, it } from 'vitest';
import { runDelivery } from '../../src/coordinator/run-delivery.js';
import { openBullMqQueue } from '../../src/queue/bullmq/bullmq-queue.js';
import { isAlive } from '../../src/store/embedded/processes.js';
import { openPostgresStore } from '../../src/store/postgres/postgres-store.js';
import { costlySweep, openCluster, undisturbed, type Cluster, type SweepFile } from '../support/cluster.js';
import { inlinePool } from '../support/inline-pool.js';
import { ownPostgres, type OwnPostgres } from '../support/services.js';
import { rowsOf } from '../support/sweeps.js';

/** The two ends of a cable between this network and another one; a process there reaches our servers by the first address. */
const subnet = `10.213.${String(process.pid % 250)}`;
const NETWORK = { name: `windrow-${String(process.pid)}`, link: `wr${String(process.pid)}`, ours: `${subnet}.1`, theirs: `${subnet}.2` };
const CUT_MS = 15_000;

const ip = (...args: string[]): boolean => spawnSync('ip', args, { stdio: 'ignore' }).status === 0;

/** Networks of runs that were killed; their cables go with them. */
function clearAbandoned(): void {
  const listed = spawnSync('ip', ['netns', 'list'], { encoding: 'utf8' }).stdout;
  for (const [name, pid] of listed.matchAll(/^windrow-(\d+)/gm)) if (!isAlive(Number(pid))) ip('netns', 'del', name);
}

function layCable(): boolean {
  const { name, link, ours, theirs } = NETWORK;
  if (process.getuid?.() !== 0 || spawnSync('ip', ['-V']).status !== 0) return false;
  clearAbandoned();
  const far = `${link}b`;
  return (
    ip('netns', 'add', name) &&
    ip('link', 'add', link, 'type', 'veth', 'peer', 'name', far, 'netns', name) &&
    ip('addr', 'add', `${ours}/24`, 'dev', link) &&
    ip('link', 'set', link, 'up') &&
    ip('-n', name, 'addr', 'add', `${theirs}/24`, 'dev', far) &&
    ip('-n', name, 'link', 'set', far, 'up') &&
    ip('-n', name, 'link', 'set', 'lo', 'up')
  );
}

const cable = layCable();
if (!cable) process.stderr.write('tests: no second network can be made here (needs root and ip); the cut of a network is SKIPPED\n');

const addresses = cable ? ['127.0.0.1', NETWORK.ours] : ['127.0.0.1'];
const postgres: OwnPostgres = await ownPostgres({
  access: cable ? `host all all ${NETWORK.theirs}/32 trust` : '',
  settings: { listen_addresses: addresses.join(',') },
});
const opened = await openCluster(
  { settings: { bind: addresses.join(' '), 'protected-mode': 'no' } },
  { url: postgres.url, open: () => openPostgresStore({ url: postgres.url }) },
);

describe.skipIf(opened === null)('a cluster and its servers', { timeout: 240_000 }, () => {
  const cluster = opened as Cluster;
  beforeAll(() => cluster.store.migrate());
  afterEach(() => cluster.calm());
  afterAll(async () => {
    await cluster.close();
    await postgres.stop();
    if (cable) ip('netns', 'del', NETWORK.name);
  });

  const sameRows = async (file: SweepFile): Promise<void> => {
    expect(await rowsOf(cluster.store, file.name)).toEqual(await undisturbed(file));
  };

  it('loses PostgreSQL to kill -9 in mid-write, twice', async () => {
    const file = costlySweep('killed-postgres', 40, 2);
    cluster.worker();
    const sweep = cluster.sweep(file);
    for (const cells of [1, 60]) {
      await cluster.untilStored(file.name, cells);
      await postgres.kill();
      await new Promise((resolve) => setTimeout(resolve, 500));
      await postgres.restart();
    }
    expect(await sweep.end, sweep.stderr()).toBe(0);
    await sameRows(file);
  });

  it('delivers every job twice', async () => {
    const file = costlySweep('twice', 10, 2.1);
    const queue = await openBullMqQueue({ url: cluster.redis.url, prefix: cluster.prefix });
    const pool = inlinePool();
    const tools = { store: cluster.store, queue, pool };
    const consumer = await queue.consume(
      async (job, delivery) => {
        await Promise.all([1, 2].map(() => runDelivery(job, delivery, tools, { memory: 2 ** 29 })));
      },
      { concurrency: 2 },
    );
    try {
      const sweep = cluster.sweep(file);
      expect(await sweep.end, sweep.stderr()).toBe(0);
    } finally {
      await consumer.close();
      await queue.close();
    }
    await sameRows(file);
  });

  it.skipIf(!cable)('cuts the link between a worker and both servers for 15 s', async () => {
    const file = costlySweep('cut', 40, 2.2);
    const through = ['ip', 'netns', 'exec', NETWORK.name];
    const remote = (url: string): string => url.replace('127.0.0.1', NETWORK.ours);
    const env = { DATABASE_URL: remote(cluster.env['DATABASE_URL']), REDIS_URL: remote(cluster.env['REDIS_URL']) };
    const far = cluster.worker([], env, through);
    const sweep = cluster.sweep(file);
    await cluster.untilStored(file.name, 1);
    ip('link', 'set', NETWORK.link, 'down');
    await new Promise((resolve) => setTimeout(resolve, CUT_MS));
    ip('link', 'set', NETWORK.link, 'up');
    // Nobody else computes: the worker itself must find its way back.
    expect(await sweep.end, `${sweep.stderr()}\n${far.stderr()}`).toBe(0);
    expect(far.ended()).toBe(false);
    await sameRows(file);
  });
});
