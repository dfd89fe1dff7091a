/** What the BullMQ adapter does beyond the conformance suite: untrusted payloads, lanes, a server that refuses, is full, or is away. */
import { Queue } from 'bullmq';
import { Redis } from 'ioredis';
import { afterAll, afterEach, beforeEach, describe, expect, it } from 'vitest';
import { openBullMqQueue, type BullMqOptions, type BullMqQueue } from '../../../src/queue/bullmq/bullmq-queue.js';
import { LANES } from '../../../src/queue/lanes.js';
import type { Job, WorkerReport } from '../../../src/queue/types.js';
import { sampleJob, twoLevelSpec } from '../../support/jobs.js';
import { ownRedis, type OwnRedis } from '../../support/redis.js';
import { gate, waitFor } from '../../support/wait-for.js';

const redis = await ownRedis();
const VERSION = 'sample-1';

describe.skipIf(redis === null)('BullMQ queue', () => {
  const server = redis as OwnRedis;
  const opened: BullMqQueue[] = [];
  let prefix: string;
  let client: Redis;

  const open = async (options: Partial<BullMqOptions> = {}): Promise<BullMqQueue> => {
    const queue = await openBullMqQueue({ url: server.url, prefix, methodVersion: VERSION, ...options });
    opened.push(queue);
    return queue;
  };
  /** Puts anything on the queue, as somebody with access to Redis could. */
  const byHand = async (data: unknown, opts: object = {}): Promise<void> => {
    const queue = new Queue(`small-${VERSION}`, { connection: client, prefix });
    await queue.add('by hand', data, opts);
    await queue.close();
  };
  const empty = (queue: BullMqQueue): Promise<void> => waitFor(async () => (await queue.depth()) === 0, 'an empty queue');
  const large = (number: number): Job => ({ ...sampleJob(number), memory: 2 * LANES[0].memory });

  beforeEach(() => {
    prefix = `test-${String(Math.random()).slice(2)}`;
    client = new Redis(server.url, { maxRetriesPerRequest: null });
    client.on('error', () => undefined);
  });
  afterEach(async () => {
    await Promise.all(opened.splice(0).map((queue) => queue.close()));
    client.disconnect();
  });
  afterAll(() => server.stop());

  it('sets a payload aside that is not a job, and goes on', async () => {
    const warnings: string[] = [];
    const queue = await open({ onWarning: (text) => warnings.push(text) });
    const good = sampleJob(1);
    const malformed: unknown[] = [
      null,
      42,
      'text',
      [],
      {},
      { ...good, id: 'x' },
      { ...good, extra: true },
      { ...good, points: [] },
      { ...good, points: [{ ...good.points[0], open: [7] }] },
      { ...good, points: [{ ...good.points[0], spec: { ...good.points[0].spec, prepared: { shell: 'rm' } } }] },
      { ...good, cost: -1 },
      JSON.parse(`{"superposition":${'['.repeat(3000)}${']'.repeat(3000)}}`),
    ];
    for (const data of malformed) await byHand(data);
    const foreign = { ...good, methodVersion: 'other-2' };
    await byHand(foreign);
    await queue.add([good]);
    const seen: Job[] = [];
    const consumer = await queue.consume(async (job) => void seen.push(job), { concurrency: 2 });
    await empty(queue);
    await consumer.close();
    expect(seen).toEqual([good]);
    expect(warnings).toHaveLength(malformed.length + 1);
    const aside = (await client.lrange(`${prefix}:aside`, 0, -1)).map((text) => JSON.parse(text) as { code: string; data: unknown });
    expect(aside.map(({ code }) => code).sort()).toEqual([...Array(malformed.length).fill('queue.payload'), 'queue.version'].sort());
    expect(aside.find(({ code }) => code === 'queue.version')?.data).toEqual(foreign);
  });

  it('leaves nothing of ended jobs behind, also where a parcel asks to be kept', async () => {
    const queue = await open();
    await byHand({}, { jobId: `job-${sampleJob(1).id}`, removeOnFail: false, removeOnComplete: false });
    let deliveries = 0;
    const consumer = await queue.consume(
      async () => {
        deliveries++;
        if (deliveries === 1) throw new TypeError('a fault of the program');
      },
      { concurrency: 1 },
    );
    await empty(queue);
    // Had it been kept, this job would be taken for the one that is there already.
    await queue.add([sampleJob(1)]);
    await empty(queue);
    await queue.add([sampleJob(1)]);
    await empty(queue);
    expect(deliveries).toBe(2);
    await consumer.close();
    const left = (await client.keys(`${prefix}:*`)).filter((key) => key.includes(':job-'));
    expect(left).toEqual([]);
  });

  it('survives a job whose stored text is not JSON', async () => {
    const queue = await open();
    await byHand(sampleJob(1), { jobId: 'broken' });
    await client.hset(`${prefix}:small-${VERSION}:broken`, 'data', '{"id":');
    const seen: string[] = [];
    await queue.consume(async (job) => void seen.push(job.id), { concurrency: 2 });
    await queue.add([sampleJob(2)]);
    await waitFor(() => seen.length === 1, 'the sound job');
    await empty(queue);
    expect(seen).toEqual([sampleJob(2).id]);
  });

  it('keeps lanes apart: a worker of the small lane never sees a large job', async () => {
    const queue = await open();
    const [small, both] = [await open({ consumed: [LANES[0]] }), await open()];
    await queue.add([sampleJob(1), large(2), sampleJob(3), { ...large(4), memory: 1e15 }]);
    const seen: string[] = [];
    const first = await small.consume(async (job) => void seen.push(job.id), { concurrency: 4 });
    await waitFor(() => seen.length === 2, 'the small jobs');
    expect(seen.sort()).toEqual([sampleJob(1).id, sampleJob(3).id].sort());
    // A handler ends before its job has left the queue.
    await first.close();
    expect(await queue.depth()).toBe(2);
    const second = await both.consume(async (job) => void seen.push(job.id), { concurrency: 4 });
    await empty(queue);
    await second.close();
    expect(seen).toHaveLength(4);
  });

  it('counts handlers over all lanes, and gives back what waits for its turn', async () => {
    const queue = await open();
    await queue.add([...[1, 2, 3].map((number) => sampleJob(number)), ...[4, 5, 6].map(large)]);
    const never = gate();
    let running = 0;
    const consumer = await queue.consume(
      async () => {
        running++;
        await never.opened;
      },
      { concurrency: 2 },
    );
    await waitFor(() => running === 2, 'two running jobs');
    await new Promise((resolve) => setTimeout(resolve, 100));
    expect(running).toBe(2);
    await consumer.close(10);
    // Given back, not left for the locks to run out.
    const active = await Promise.all(LANES.map((lane) => client.llen(`${prefix}:${lane.name}-${VERSION}:active`)));
    expect(active).toEqual(LANES.map(() => 0));
    expect(await queue.depth()).toBe(6);
    never.open();
  });

  it('delivers a job again that lost its worker, and says so', async () => {
    const queue = await open({ timing: { lockMs: 500, searchMs: 250 } });
    await queue.add([sampleJob(1)]);
    const losses: number[] = [];
    const consumer = await queue.consume(
      async (_job, delivery) => {
        losses.push(delivery.losses);
        // The lock of a worker that is cut off ends; here somebody deletes it.
        if (losses.length < 3) {
          const key = `${prefix}:small-${VERSION}:job-${sampleJob(1).id}:lock`;
          await client.set(key, 'another worker', 'PX', 1);
          await new Promise((resolve) => setTimeout(resolve, 1500));
        }
      },
      { concurrency: 1 },
    );
    await waitFor(async () => losses.length === 3 && (await queue.depth()) === 0, 'the third delivery');
    await consumer.close();
    expect(losses).toEqual([0, 1, 2]);
  });

  it('refuses a job of another method version', async () => {
    const queue = await open({ methodVersion: 'other-2' });
    await expect(queue.add([sampleJob(1)])).rejects.toMatchObject({
      code: 'queue.version',
      details: { found: VERSION, allowed: 'other-2' },
    });
    // Nor does it see those of another one.
    await (await open()).add([sampleJob(1)]);
    expect(await queue.depth()).toBe(0);
  });

  it('says that it is full, and takes jobs again when there is room', async () => {
    const queue = await open();
    await queue.add([sampleJob(0)]);
    const used = Number(/used_memory:(\d+)/.exec(await client.info('memory'))![1]);
    await client.config('SET', 'maxmemory', String(Math.floor(used / 2)));
    try {
      await expect(queue.add([sampleJob(1, 50)])).rejects.toMatchObject({ code: 'queue.full', retryable: true });
      expect(await queue.depth()).toBe(1);
    } finally {
      await client.config('SET', 'maxmemory', '0');
    }
    await queue.add([sampleJob(1, 50)]);
    expect(await queue.depth()).toBe(2);
  });

  it('warns of a policy that throws jobs away', async () => {
    const warnings: string[] = [];
    await client.config('SET', 'maxmemory-policy', 'allkeys-lru');
    try {
      await open({ onWarning: (text) => warnings.push(text) });
    } finally {
      await client.config('SET', 'maxmemory-policy', 'noeviction');
    }
    expect(warnings).toEqual([expect.stringContaining("'allkeys-lru'")]);
    await open({ onWarning: (text) => warnings.push(text) });
    expect(warnings).toHaveLength(1);
  });

  it('refuses a wrong password without telling it', async () => {
    await client.config('SET', 'requirepass', 'right');
    try {
      const url = new URL(server.url);
      url.password = 'a-wrong-secret';
      const error = await open({ url: url.href }).then(
        () => null,
        (reason: unknown) => reason as Error,
      );
      expect(error).toMatchObject({ code: 'queue.refused' });
      expect(JSON.stringify([error, error?.message])).not.toContain('secret');
      await expect(open()).rejects.toMatchObject({ code: 'queue.refused' });
    } finally {
      await client.config('SET', 'requirepass', '');
    }
  });

  it.each(['http://127.0.0.1', 'redis://', 'no url with a-secret', ''])('refuses the address %j', async (url) => {
    await expect(open({ url })).rejects.toMatchObject({
      code: 'settings.invalid',
      message: expect.not.stringContaining('secret') as string,
    });
  });

  it('tells at once where no server answers', async () => {
    await expect(open({ url: 'redis://127.0.0.1:1' })).rejects.toMatchObject({ code: 'queue.unreachable', retryable: true });
  });

  it('refuses a prefix that could leave its place', async () => {
    await expect(open({ prefix: 'a:b' })).rejects.toMatchObject({ code: 'settings.invalid' });
  });

  it('keeps a registry of workers, with ages by the server', async () => {
    const { workers } = await open();
    const report: WorkerReport = {
      id: 'one',
      host: 'host',
      pid: 1,
      threads: 2,
      memory: 1e9,
      lanes: ['small'],
      methodVersion: VERSION,
      state: 'working',
      started: new Date(0).toISOString(),
      jobs: 0,
      points: 0,
      current: [{ sweep: 'sample', point: twoLevelSpec(1) }],
    };
    await workers.report(report);
    await workers.report({ ...report, id: 'two', pid: 2, state: 'draining' });
    const listed = await workers.list();
    expect(listed).toMatchObject([report, { id: 'two', state: 'draining' }]);
    expect(listed.every(({ age }) => age >= 0 && age < 10)).toBe(true);
    // Silent for longer than it is remembered; and nonsense put there by hand.
    await client.pexpire(`${prefix}:worker:one`, 1);
    await client.sadd(`${prefix}:workers`, 'three');
    await client.set(`${prefix}:worker:three`, 'no JSON');
    await waitFor(async () => (await workers.list()).length === 1, 'the silent worker to be forgotten');
    await workers.remove('two');
    expect(await workers.list()).toEqual([]);
  });

  // Last, as it restarts the server that the others use.
  it('loses its jobs with a server that keeps nothing, says when the server is away, and goes on', async () => {
    const queue = await open();
    const seen: string[] = [];
    await queue.add([large(1)]);
    const consumer = await queue.consume(async (job) => void seen.push(job.id), { concurrency: 1 });
    await waitFor(() => seen.length === 1, 'the first job');
    await server.kill();
    await expect(queue.depth()).rejects.toMatchObject({ code: 'queue.unreachable', retryable: true });
    await server.restart();
    await waitFor(async () => (await queue.depth().catch(() => -1)) === 0, 'the server');
    await queue.add([sampleJob(2)]);
    await waitFor(() => seen.length === 2, 'the second job');
    await consumer.close();
  });
});
