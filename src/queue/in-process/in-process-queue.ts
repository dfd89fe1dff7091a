/**
 * The job queue of one machine: jobs wait in the memory of this process.
 *
 * Guarantees: first in, first out (a job delivered again keeps no place); an id that waits, runs or is about to be delivered again is
 * not added twice; a bounded number of jobs, so that a feeder cannot pour a grid into memory. Nothing survives the process, which costs
 * nothing: the store and the sweep file rebuild it.
 *
 * A job whose handler rejects with a retryable error is delivered again after a growing delay, at most `attempts` times in all; any
 * other rejection ends the job. Whoever feeds the queue compares with the store and adds what is still missing.
 *
 * @throws queue.full when the bound would be passed (then none of the jobs is added), queue.unreachable after `close`
 */
import { WindrowError } from '../../core/errors.js';
import { BACKOFF, backoffDelay, isRetryable, pause, type Backoff } from '../../core/retry.js';
import type { Consumer, Job, JobQueue } from '../types.js';

export interface InProcessQueueOptions {
  /** most jobs waiting and running; default 10,000 */
  readonly capacity?: number;
  /** deliveries of one job, the first included; default 8 */
  readonly attempts?: number;
  readonly backoff?: Backoff;
}

interface Entry {
  readonly job: Job;
  deliveries: number;
}

export function openInProcessQueue(options: InProcessQueueOptions = {}): JobQueue {
  const { capacity = 10_000, attempts = 8, backoff = BACKOFF } = options;
  /** every job this queue answers for, by id */
  const held = new Map<string, Entry>();
  /** those that can be delivered now, oldest first */
  const ready = new Set<Entry>();
  const timers = new Set<NodeJS.Timeout>();
  const pumps = new Set<() => void>();
  const consumers = new Set<Consumer>();
  let open = true;

  const offer = (entry: Entry): void => {
    ready.add(entry);
    for (const pump of pumps) pump();
  };

  const offerLater = (entry: Entry): void => {
    const timer = setTimeout(
      () => {
        timers.delete(timer);
        offer(entry);
      },
      backoffDelay(entry.deliveries, backoff),
    );
    timers.add(timer);
  };

  const consume: JobQueue['consume'] = (handler, { concurrency }) => {
    if (!open) return Promise.reject(closedError());
    const running = new Map<Entry, Promise<void>>();
    let taking = true;

    const deliver = async (entry: Entry): Promise<void> => {
      entry.deliveries++;
      let again = false;
      try {
        await handler(entry.job, { losses: 0 });
      } catch (error) {
        again = isRetryable(error) && entry.deliveries < attempts;
      }
      // Abandoned meanwhile: the entry is no longer ours, and rows are idempotent.
      if (!running.delete(entry)) return;
      if (again) offerLater(entry);
      else held.delete(entry.job.id);
      pump();
    };

    const pump = (): void => {
      for (const entry of ready) {
        if (!taking || running.size >= concurrency) return;
        ready.delete(entry);
        // The handler starts in a later microtask, so that it never runs inside `add`.
        running.set(
          entry,
          Promise.resolve().then(() => deliver(entry)),
        );
      }
    };

    const consumer: Consumer = {
      async close(graceMs) {
        taking = false;
        pumps.delete(pump);
        consumers.delete(consumer);
        const ended = Promise.all(running.values());
        if (graceMs === undefined) {
          await ended;
          return;
        }
        const grace = new AbortController();
        await Promise.race([ended, pause(graceMs, grace.signal)]);
        grace.abort();
        const abandoned = [...running.keys()];
        running.clear();
        for (const entry of abandoned) offer(entry);
      },
    };
    pumps.add(pump);
    consumers.add(consumer);
    pump();
    return Promise.resolve(consumer);
  };

  return {
    add(jobs) {
      if (!open) return Promise.reject(closedError());
      const fresh = new Map(jobs.filter((job) => !held.has(job.id)).map((job) => [job.id, job]));
      if (held.size + fresh.size > capacity) {
        return Promise.reject(
          new WindrowError('queue.full', `the queue holds ${held.size} jobs and cannot take ${fresh.size} more`, {
            found: String(held.size + fresh.size),
            allowed: `at most ${capacity}`,
          }),
        );
      }
      for (const job of fresh.values()) {
        const entry: Entry = { job, deliveries: 0 };
        held.set(job.id, entry);
        offer(entry);
      }
      return Promise.resolve();
    },
    depth: () => Promise.resolve(held.size),
    consume,
    async close() {
      open = false;
      for (const timer of timers) clearTimeout(timer);
      ready.clear();
      await Promise.all([...consumers].map((consumer) => consumer.close()));
      held.clear();
    },
  };
}

const closedError = (): WindrowError => new WindrowError('queue.unreachable', 'the queue of this process is closed');
