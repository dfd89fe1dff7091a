/**
 * Faults of a cluster, with real servers and real processes: whatever dies, the rows at the end are those of a run that nothing
 * disturbed.
 */
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { cellsOf, costlySweep, openCluster, undisturbed, type Cluster, type SweepFile } from '../support/cluster.js';
import { canStartRedis } from '../support/redis.js';
import { rowsOf } from '../support/sweeps.js';
import { waitFor } from '../support/wait-for.js';

describe.skipIf(!canStartRedis())('a cluster', { timeout: 180_000 }, () => {
  let cluster: Cluster;
  beforeEach(async () => {
    cluster = (await openCluster()) as Cluster;
  });
  afterEach(async () => {
    await cluster.calm();
    await cluster.close();
  });

  const sameRows = async (file: SweepFile): Promise<void> => {
    expect(await rowsOf(cluster.store, file.name)).toEqual(await undisturbed(file));
    expect((await cluster.store.findSweep(file.name))?.state).toBe('done');
  };

  it('computes a sweep with two workers and shows them', async () => {
    const file = costlySweep('calm');
    const workers = [cluster.worker(), cluster.worker()];
    const sweep = cluster.sweep(file, ['--format', 'json']);
    expect(await sweep.end, sweep.stderr()).toBe(0);
    expect(JSON.parse(sweep.stdout())).toMatchObject({ outcome: 'done', computed: cellsOf(), failed: 0 });
    await sameRows(file);
    for (const worker of workers) worker.kill('SIGTERM');
    expect(await Promise.all(workers.map((worker) => worker.end))).toEqual([0, 0]);
    // Nothing is left in Redis but what the queues say about themselves.
    expect((await cluster.client.keys(`${cluster.prefix}:*`)).filter((key) => /:job-|worker/.test(key))).toEqual([]);
  });

  it('leaves a sweep to the workers, shows them, and follows it', async () => {
    const file = costlySweep('detached');
    const detached = cluster.sweep(file, ['--detach']);
    expect(await detached.end, detached.stderr()).toBe(0);
    expect(detached.stderr()).toContain('no worker of method');
    cluster.worker();
    await cluster.untilStored(file.name, 1);
    const shown = cluster.cli(['status', '--workers', '--format', 'json']);
    expect(await shown.end, shown.stderr()).toBe(0);
    expect(JSON.parse(shown.stdout())).toMatchObject([{ state: 'working', threads: 1, lanes: 'small' }]);
    const followed = cluster.cli(['status', file.name, '--follow', '--format', 'json']);
    expect(await followed.end, followed.stderr()).toBe(0);
    expect(JSON.parse(followed.stdout())).toMatchObject({ state: 'done', stored_cells: cellsOf() });
    await sameRows(file);
  });

  it('loses a worker to kill -9 in mid-job', async () => {
    const file = costlySweep('killed-worker');
    const victim = cluster.worker();
    const sweep = cluster.sweep(file);
    await cluster.untilStored(file.name, 1);
    await cluster.untilActive();
    victim.kill('SIGKILL');
    await victim.end;
    expect(await cluster.storedCells(file.name)).toBeLessThan(cellsOf());
    cluster.worker();
    expect(await sweep.end, sweep.stderr()).toBe(0);
    await sameRows(file);
  });

  it('loses two workers to kill -9 on the same job, which is then split', async () => {
    const file = costlySweep('killed-twice', 4);
    const sweep = cluster.sweep(file);
    const seen: string[] = [];
    for (let loss = 0; loss < 2; loss++) {
      const victim = cluster.worker();
      await waitFor(async () => (await cluster.active()).some((id) => loss === 0 || seen.includes(id)), 'the job at a worker');
      seen.push(...(await cluster.active()));
      victim.kill('SIGKILL');
      await victim.end;
    }
    cluster.worker();
    expect(await sweep.end, sweep.stderr()).toBe(0);
    await sameRows(file);
  });

  it('loses the process that feeds it: a worker carries the sweep on', async () => {
    const file = costlySweep('killed-feeder');
    const worker = cluster.worker();
    const sweep = cluster.sweep(file);
    await cluster.untilStored(file.name, 1);
    sweep.kill('SIGKILL');
    await sweep.end;
    await waitFor(async () => (await cluster.store.findSweep(file.name))?.state === 'done', 'the end of the sweep', 120_000);
    expect(worker.stderr()).toContain('carried on');
    await sameRows(file);
  });

  it('loses Redis and everything in it', async () => {
    const file = costlySweep('killed-redis');
    cluster.worker();
    const sweep = cluster.sweep(file);
    await cluster.untilStored(file.name, 1);
    await cluster.redis.kill();
    await new Promise((resolve) => setTimeout(resolve, 1000));
    await cluster.redis.restart();
    expect(await sweep.end, sweep.stderr()).toBe(0);
    await sameRows(file);
  });

  it('meets a Redis whose memory is full', async () => {
    const file = costlySweep('full-redis');
    await cluster.client.config('SET', 'maxmemory', '1mb');
    try {
      cluster.worker();
      const sweep = cluster.sweep(file);
      await waitFor(async () => (await cluster.store.findSweep(file.name)) !== null, 'the sweep');
      await new Promise((resolve) => setTimeout(resolve, 3000));
      expect(await cluster.storedCells(file.name)).toBe(0);
      await cluster.client.config('SET', 'maxmemory', '0');
      expect(await sweep.end, sweep.stderr()).toBe(0);
    } finally {
      await cluster.client.config('SET', 'maxmemory', '0');
    }
    await sameRows(file);
  });

  it('drains a worker at SIGTERM: what runs is stored, the rest is given back', async () => {
    const file = costlySweep('drained');
    const first = cluster.worker(['--grace', '60', '--format', 'json']);
    const sweep = cluster.sweep(file);
    await cluster.untilStored(file.name, 1);
    first.kill('SIGTERM');
    expect(await first.end, first.stderr()).toBe(0);
    const drained = JSON.parse(first.stdout()) as { cells: number };
    // Everything it computed is stored, and nothing is left at it.
    expect(await cluster.storedCells(file.name)).toBe(drained.cells);
    expect(await cluster.active()).toEqual([]);
    cluster.worker();
    expect(await sweep.end, sweep.stderr()).toBe(0);
    await sameRows(file);
  });

  it('gives back what a grace of nothing interrupts, and ends at once at the second SIGTERM', async () => {
    const file = costlySweep('hurried');
    const first = cluster.worker(['--grace', '0']);
    const sweep = cluster.sweep(file);
    await cluster.untilStored(file.name, 1);
    await cluster.untilActive();
    first.kill('SIGTERM');
    expect(await first.end, first.stderr()).toBe(0);
    expect(await cluster.active()).toEqual([]);
    const second = cluster.worker(['--grace', '3600']);
    await cluster.untilActive();
    second.kill('SIGTERM');
    await waitFor(() => second.stderr().includes('finishing what runs'), 'the first signal to arrive');
    second.kill('SIGTERM');
    expect([0, 130]).toContain(await second.end);
    cluster.worker();
    expect(await sweep.end, sweep.stderr()).toBe(0);
    await sameRows(file);
  });

  it('has two processes that feed the same sweep', async () => {
    const file = costlySweep('two-feeders');
    cluster.worker();
    const sweeps = [cluster.sweep(file), cluster.sweep(file)];
    expect(await Promise.all(sweeps.map((sweep) => sweep.end)), sweeps.map((sweep) => sweep.stderr()).join()).toEqual([0, 0]);
    await sameRows(file);
  });

  it('freezes a worker past its lock and lets it go on', async () => {
    const file = costlySweep('frozen', 6);
    const frozen = cluster.worker();
    const sweep = cluster.sweep(file);
    await cluster.untilActive();
    frozen.kill('SIGSTOP');
    cluster.worker();
    expect(await sweep.end, sweep.stderr()).toBe(0);
    frozen.kill('SIGCONT');
    // It finishes what it had, is told that the job is no longer its own, and goes on.
    const after = costlySweep('after-frozen', 6, 0.1);
    const second = cluster.sweep(after);
    expect(await second.end, second.stderr()).toBe(0);
    expect(frozen.ended()).toBe(false);
    await sameRows(file);
    await sameRows(after);
  });

  it('has a worker whose clock is an hour ahead', async () => {
    const file = costlySweep('skewed');
    const skew = `data:text/javascript,${encodeURIComponent('const now = Date.now; Date.now = () => now() + 3_600_000;')}`;
    cluster.worker([], { NODE_OPTIONS: `--import=${skew}` });
    cluster.worker();
    const sweep = cluster.sweep(file);
    await cluster.untilStored(file.name, 1);
    // A fault of the infrastructure at the skewed worker must not send its jobs an hour into the future.
    await cluster.redis.kill();
    await cluster.redis.restart();
    expect(await sweep.end, sweep.stderr()).toBe(0);
    await sameRows(file);
  });

  it('stops a sweep when it is asked to, and resumes it', async () => {
    const file = costlySweep('stopped');
    const worker = cluster.worker();
    const sweep = cluster.sweep(file);
    await cluster.untilStored(file.name, 1);
    // Held for the while that the command takes to start, for the sweep is short.
    worker.kill('SIGSTOP');
    const stop = cluster.cli(['stop', file.name]);
    expect(await stop.end, stop.stderr()).toBe(0);
    worker.kill('SIGCONT');
    expect(await sweep.end, sweep.stderr()).toBe(130);
    await waitFor(async () => (await cluster.active()).length === 0, 'the worker to finish');
    expect(await cluster.storedCells(file.name)).toBeLessThan(cellsOf());
    const resumed = cluster.cli(['resume', file.name]);
    expect(await resumed.end, resumed.stderr()).toBe(0);
    expect(worker.ended()).toBe(false);
    await sameRows(file);
  });
});
