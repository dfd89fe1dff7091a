/**
 * What every JobQueue must do, whatever carries it. An adapter's test file calls `jobQueueSuite` with a factory of empty queues.
 *
 * Two handles of one queue (`open` called twice) stand for two processes where the engine allows it; an adapter that lives in one
 * process hands out the same queue.
 */
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import fc from 'fast-check';
import { WindrowError } from '../../src/core/errors.js';
import type { Consumer, Job, JobQueue } from '../../src/queue/types.js';
import { sampleJob } from '../support/jobs.js';
import { gate, waitFor } from '../support/wait-for.js';

export interface QueueHarness {
  /** a handle of the queue under test; handles of one harness share their jobs */
  open(): Promise<JobQueue>;
  /** removes what the test left */
  clear(): Promise<void>;
}

const retryable = (): WindrowError => new WindrowError('store.unreachable', 'the store is away for a moment');
const final = (): WindrowError => new WindrowError('queue.payload', 'this job can never be run');

export function jobQueueSuite(name: string, makeHarness: () => Promise<QueueHarness>): void {
  describe(`job queue: ${name}`, () => {
    let harness: QueueHarness;
    let queue: JobQueue;
    const consumers: Consumer[] = [];

    const consume = async (handler: (job: Job) => Promise<void>, concurrency = 1, from = queue): Promise<Consumer> => {
      const consumer = await from.consume(handler, { concurrency });
      consumers.push(consumer);
      return consumer;
    };
    const empty = (): Promise<void> => waitFor(async () => (await queue.depth()) === 0, 'an empty queue');
    const jobs = (count: number): Job[] => Array.from({ length: count }, (_, number) => sampleJob(number));

    beforeEach(async () => {
      harness = await makeHarness();
      queue = await harness.open();
    });
    afterEach(async () => {
      await Promise.all(consumers.splice(0).map((consumer) => consumer.close(0)));
      await harness.clear();
    });

    it('delivers a job as it was added', async () => {
      const seen: Job[] = [];
      const job = sampleJob(1, 3);
      await queue.add([job]);
      await consume(async (delivered) => void seen.push(delivered));
      await empty();
      expect(seen).toEqual([job]);
    });

    it('delivers every job once when nothing goes wrong, whether it came before or after the consumer', async () => {
      const seen: string[] = [];
      const all = jobs(200);
      await queue.add(all.slice(0, 120));
      await consume(async (job) => void seen.push(job.id), 4);
      await queue.add(all.slice(120));
      await empty();
      expect([...seen].sort()).toEqual(all.map(({ id }) => id).sort());
    });

    it('takes an empty list', async () => {
      await queue.add([]);
      expect(await queue.depth()).toBe(0);
    });

    it('does not add an id that waits', async () => {
      await queue.add([sampleJob(1), sampleJob(1)]);
      await queue.add([sampleJob(1), sampleJob(2)]);
      expect(await queue.depth()).toBe(2);
      let deliveries = 0;
      await consume(async () => {
        deliveries++;
      });
      await empty();
      expect(deliveries).toBe(2);
    });

    it('does not add an id that runs, and takes it again when it has ended', async () => {
      const running = gate();
      let deliveries = 0;
      await queue.add([sampleJob(1)]);
      await consume(async () => {
        deliveries++;
        await running.opened;
      }, 2);
      await waitFor(() => deliveries === 1, 'the delivery');
      await queue.add([sampleJob(1)]);
      expect(await queue.depth()).toBe(1);
      running.open();
      await empty();
      expect(deliveries).toBe(1);
      await queue.add([sampleJob(1)]);
      await waitFor(() => deliveries === 2, 'the second delivery');
    });

    it('counts waiting and running jobs', async () => {
      const running = gate();
      let started = 0;
      await queue.add(jobs(5));
      expect(await queue.depth()).toBe(5);
      await consume(async () => {
        started++;
        await running.opened;
      }, 2);
      await waitFor(() => started === 2, 'two running jobs');
      expect(await queue.depth()).toBe(5);
      running.open();
      await empty();
    });

    it('runs as many handlers at once as allowed, and no more', async () => {
      let now = 0;
      let most = 0;
      await queue.add(jobs(30));
      await consume(async () => {
        most = Math.max(most, ++now);
        await new Promise((resolve) => setTimeout(resolve, 20));
        now--;
      }, 3);
      await empty();
      expect(most).toBe(3);
    });

    it('delivers a job again after a retryable error', async () => {
      let deliveries = 0;
      await queue.add([sampleJob(1)]);
      await consume(async () => {
        if (++deliveries < 3) throw retryable();
      });
      await empty();
      expect(deliveries).toBe(3);
    });

    it.each([
      ['an error that cannot pass', final],
      ['a programming error', () => new TypeError('not a function')],
    ])('ends a job after %s and goes on with the others', async (_, error) => {
      const seen: string[] = [];
      const all = jobs(4);
      await queue.add(all);
      await consume(async (job) => {
        seen.push(job.id);
        if (job.id === all[1].id) throw error();
      });
      await empty();
      expect([...seen].sort()).toEqual(all.map(({ id }) => id).sort());
      // Ended, not kept: the same content can be added again.
      await queue.add([all[1]]);
      await waitFor(() => seen.length === 5, 'the job to be delivered when added again');
    });

    it('closes a consumer when its running jobs have ended, and leaves the rest waiting', async () => {
      const running = gate();
      let started = 0;
      let ended = 0;
      await queue.add(jobs(6));
      const consumer = await consume(async () => {
        started++;
        await running.opened;
        ended++;
      }, 2);
      await waitFor(() => started === 2, 'two running jobs');
      let closed = false;
      const closing = consumer.close().then(() => (closed = true));
      await new Promise((resolve) => setTimeout(resolve, 50));
      expect(closed).toBe(false);
      running.open();
      await closing;
      expect([started, ended, await queue.depth()]).toEqual([2, 2, 4]);
    });

    it('delivers abandoned jobs to another consumer', async () => {
      const never = gate();
      const seen: string[] = [];
      await queue.add(jobs(3));
      let started = 0;
      const consumer = await consume(async () => {
        started++;
        await never.opened;
      }, 1);
      await waitFor(() => started === 1, 'a running job');
      await consumer.close(10);
      await consume(async (job) => void seen.push(job.id), 1, await harness.open());
      await waitFor(() => new Set(seen).size === 3, 'all jobs at the other consumer');
      never.open();
      await empty();
    });

    it('shares jobs between consumers without delivering one twice', async () => {
      const seen: string[][] = [[], []];
      const all = jobs(60);
      const other = await harness.open();
      for (const [index, handle] of [queue, other].entries()) {
        await consume(
          async (job) => {
            seen[index].push(job.id);
            await new Promise((resolve) => setTimeout(resolve, 5));
          },
          2,
          handle,
        );
      }
      await queue.add(all);
      await empty();
      expect(seen.flat().sort()).toEqual(all.map(({ id }) => id).sort());
      expect(seen.every((part) => part.length > 0)).toBe(true);
    });

    it('delivers every job at least once and runs empty, whichever deliveries fail', async () => {
      await fc.assert(
        fc.asyncProperty(
          fc.array(fc.nat(2), { minLength: 1, maxLength: 12 }),
          fc.integer({ min: 1, max: 4 }),
          async (faults, concurrency) => {
            const left = new Map(faults.map((count, number) => [sampleJob(number).id, count]));
            const succeeded = new Set<string>();
            const consumer = await queue.consume(
              async ({ id }) => {
                const count = left.get(id) ?? 0;
                left.set(id, count - 1);
                if (count > 0) throw retryable();
                succeeded.add(id);
              },
              { concurrency },
            );
            await queue.add(jobs(faults.length));
            await empty();
            await consumer.close();
            expect(succeeded.size).toBe(faults.length);
          },
        ),
        { numRuns: 8 },
      );
    });

    it('refuses jobs when it is closed', async () => {
      await queue.close();
      await expect(queue.add([sampleJob(1)])).rejects.toMatchObject({ code: 'queue.unreachable' });
    });
  });
}
