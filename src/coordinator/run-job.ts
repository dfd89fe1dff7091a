/**
 * One job from delivery to stored rows: read the stored measures, evaluate on the pool, save everything in one transaction.
 *
 * Whoever consumes the queue calls this, in one process or on many hosts. It may run twice for the same job, at the same time or after a
 * crash between saving and acknowledging: rows are idempotent. A store that is away for a moment is waited for, because what was
 * computed would be lost with the job.
 *
 * @throws queue.version (not retryable) for a job of another method version; errors of the store; errors of the pool
 */
import { WindrowError } from '../core/errors.js';
import { withRetry } from '../core/retry.js';
import type { ComputePool, Job } from '../queue/types.js';
import type { ResultStore } from '../store/types.js';
import { METHOD_VERSION } from '../sweep/identity.js';
import type { PointTask } from '../sweep/types.js';

export interface RunJobOptions {
  /** bytes one evaluation may use */
  readonly memory: number;
  /** ends the waiting for a store that is away */
  readonly signal?: AbortSignal | undefined;
}

export interface JobReport {
  readonly points: number;
  readonly cells: number;
  readonly failures: number;
  /** seconds: spectral measures and statistics (CPU, by the pool), store (wall clock) */
  readonly seconds: { readonly kernel: number; readonly statistics: number; readonly store: number };
}

export async function runJob(job: Job, store: ResultStore, pool: ComputePool, options: RunJobOptions): Promise<JobReport> {
  if (job.methodVersion !== METHOD_VERSION) {
    throw new WindrowError('queue.version', `a job of sweep '${job.sweep}' was made by another version of windrow: update the older one`, {
      where: `job ${job.id}`,
      found: job.methodVersion,
      allowed: METHOD_VERSION,
    });
  }
  const begun = performance.now();
  const tasks = await withRetry(() => loadTasks(job, store), { signal: options.signal });
  const loaded = performance.now();
  const outcomes = await pool.run(tasks, { memory: options.memory });
  const evaluated = performance.now();
  const batch = {
    points: outcomes.flatMap(({ point }) => point ?? []),
    cells: outcomes.flatMap(({ cells }) => cells),
    failures: outcomes.flatMap(({ failure }) => failure ?? []),
  };
  await withRetry(() => store.save(batch), { signal: options.signal });
  const sum = (part: 'kernel' | 'statistics'): number => outcomes.reduce((total, { seconds }) => total + seconds[part], 0);
  return {
    points: batch.points.length,
    cells: batch.cells.length,
    failures: batch.failures.length,
    seconds: {
      kernel: sum('kernel'),
      statistics: sum('statistics'),
      store: (loaded - begun + performance.now() - evaluated) / 1000,
    },
  };
}

async function loadTasks(job: Job, store: ResultStore): Promise<PointTask[]> {
  const ids = job.points.filter(({ measured }) => measured).map(({ id }) => id);
  const measures = ids.length === 0 ? null : await store.measures(ids);
  return job.points.map(({ id, spec, open }) => ({
    id,
    spec,
    // A measure that has gone from the store since is computed again.
    stored: measures?.get(id) ?? null,
    questions: open.map((index) => job.questions[index]),
  }));
}
