/**
 * What a worker does with a delivered job: checks that it may be believed, decides whether it is too dangerous to run, runs it.
 *
 * A job that has lost two workers (killed for want of memory, say) is suspected: its points become jobs of their own, and a point that
 * loses two workers alone is stored as failed with that reason, so that no point can take down a cluster.
 *
 * @throws queue.payload for ids that are not those of the content; whatever `runJob` throws
 */
import { withRetry } from '../core/retry.js';
import { verifyJob } from '../queue/job-form.js';
import type { ComputePool, Delivery, Job, JobQueue } from '../queue/types.js';
import type { ResultStore } from '../store/types.js';
import { splitJob } from './bundler.js';
import { runJob, type JobReport, type RunJobOptions } from './run-job.js';

/** Workers a job may lose before it is suspected. */
const LOSSES = 2;

export interface DeliveryTools {
  readonly store: ResultStore;
  readonly queue: JobQueue;
  readonly pool: ComputePool;
}

export async function runDelivery(
  job: Job,
  { losses }: Delivery,
  { store, queue, pool }: DeliveryTools,
  options: RunJobOptions,
): Promise<JobReport> {
  verifyJob(job);
  if (losses < LOSSES) return runJob(job, store, pool, options);
  const failures =
    job.points.length === 1
      ? job.points.map(({ id, spec }) => ({ id, spec, code: 'point.too-large', message: reason(losses) }) as const)
      : [];
  if (failures.length > 0) await withRetry(() => store.save({ points: [], cells: [], failures }), { signal: options.signal });
  else await withRetry(() => queue.add(splitJob(job)), { signal: options.signal });
  return { points: 0, cells: 0, failures: failures.length, seconds: { kernel: 0, statistics: 0, store: 0 } };
}

const reason = (losses: number): string =>
  `${losses} workers were lost while they computed this point alone (killed for want of memory, perhaps); allow a worker more memory and retry`;
