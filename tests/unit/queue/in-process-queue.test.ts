import { describe, expect, it } from 'vitest';
import { WindrowError } from '../../../src/core/errors.js';
import { openInProcessQueue } from '../../../src/queue/in-process/in-process-queue.js';
import { sampleJob } from '../../support/jobs.js';
import { gate, waitFor } from '../../support/wait-for.js';

const jobs = (count: number) => Array.from({ length: count }, (_, number) => sampleJob(number));

describe('in-process queue', () => {
  it('refuses jobs past its bound, all or none, and takes them when there is room', async () => {
    const queue = openInProcessQueue({ capacity: 3 });
    await queue.add(jobs(2));
    await expect(queue.add(jobs(4))).rejects.toMatchObject({ code: 'queue.full', retryable: true });
    expect(await queue.depth()).toBe(2);
    // Known ids take no room.
    await queue.add(jobs(3));
    expect(await queue.depth()).toBe(3);
    await queue.close();
  });

  it('delivers in the order of adding', async () => {
    const queue = openInProcessQueue();
    const seen: string[] = [];
    await queue.add(jobs(20));
    await queue.consume(async ({ id }) => void seen.push(id), { concurrency: 1 });
    await waitFor(async () => (await queue.depth()) === 0, 'an empty queue');
    expect(seen).toEqual(jobs(20).map(({ id }) => id));
    await queue.close();
  });

  it('gives a job up after its last delivery', async () => {
    const queue = openInProcessQueue({ attempts: 4, backoff: { firstMs: 1, ceilingMs: 2 } });
    let deliveries = 0;
    await queue.add(jobs(1));
    await queue.consume(
      async () => {
        deliveries++;
        throw new WindrowError('store.unreachable', 'the store is away');
      },
      { concurrency: 1 },
    );
    await waitFor(async () => (await queue.depth()) === 0, 'the job to be given up');
    expect(deliveries).toBe(4);
    await queue.close();
  });

  it('counts a job that waits for its next delivery, and does not add it again', async () => {
    const queue = openInProcessQueue({ backoff: { firstMs: 60_000, ceilingMs: 60_000 } });
    let deliveries = 0;
    await queue.add(jobs(1));
    await queue.consume(
      async () => {
        deliveries++;
        throw new WindrowError('store.unreachable', 'the store is away');
      },
      { concurrency: 1 },
    );
    await waitFor(() => deliveries === 1, 'the first delivery');
    await new Promise((resolve) => setTimeout(resolve, 5));
    await queue.add(jobs(1));
    expect([await queue.depth(), deliveries]).toEqual([1, 1]);
    await queue.close();
  });

  it('waits for running jobs when it is closed, and delivers no waiting one', async () => {
    const queue = openInProcessQueue();
    const running = gate();
    let started = 0;
    let ended = 0;
    await queue.add(jobs(3));
    await queue.consume(
      async () => {
        started++;
        await running.opened;
        ended++;
      },
      { concurrency: 1 },
    );
    await waitFor(() => started === 1, 'a running job');
    const closing = queue.close();
    running.open();
    await closing;
    expect([started, ended]).toEqual([1, 1]);
    await expect(queue.consume(async () => undefined, { concurrency: 1 })).rejects.toMatchObject({ code: 'queue.unreachable' });
  });
});
