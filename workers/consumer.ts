/**
 * The queue consumer: a worker's life from its first job to its last.
 *
 * Guarantees: computes on the threads of the pool while this process's loop stays free to renew locks and to report; reports itself to
 * the registry every few seconds; drops the jobs of stopped sweeps; when the signal is aborted it takes nothing new, finishes and stores what runs within the grace, and
 * gives the rest back to the queue. Whatever happens to it, results that were stored stay, and jobs that were not are delivered again.
 */
import { runDelivery } from '../src/coordinator/run-delivery.js';
import { pause } from '../src/core/retry.js';
import type { ComputePool, Job, JobQueue, WorkerRegistry, WorkerReport } from '../src/queue/types.js';
import type { ResultStore } from '../src/store/types.js';

export interface ConsumerRun {
  readonly store: ResultStore;
  readonly queue: JobQueue;
  readonly workers: WorkerRegistry;
  readonly pool: ComputePool;
  /** who this is */
  readonly identity: Pick<WorkerReport, 'id' | 'host' | 'pid' | 'memory' | 'lanes' | 'methodVersion' | 'started'>;
  /** bytes an evaluation of this job may use */
  readonly memoryFor: (job: Job) => number;
  /** Aborting it drains. */
  readonly signal: AbortSignal;
  /** milliseconds a drain may take before running jobs are given back */
  readonly graceMs: number;
  /** milliseconds between two reports; default 5,000 */
  readonly reportMs?: number;
  readonly onJob?: (job: Job, seconds: number) => void;
  readonly onError?: (job: Job, error: unknown) => void;
}

export interface ConsumerSummary {
  readonly jobs: number;
  readonly points: number;
  readonly cells: number;
  readonly failures: number;
}

const REPORT_MS = 5_000;

/** Resolves when the worker has drained. The pool, the queue and the store are left to be closed by whoever opened them. */
export async function consumeJobs(run: ConsumerRun): Promise<ConsumerSummary> {
  const { store, queue, workers, pool, identity, signal } = run;
  const total = { jobs: 0, points: 0, cells: 0, failures: 0 };
  const running = new Set<Job>();

  const stopping = stopWatch(store);

  const handle: Parameters<JobQueue['consume']>[0] = async (job, delivery) => {
    const begun = performance.now();
    // What still waits of a sweep that was stopped is dropped; resuming finds it missing.
    if (await stopping(job.sweep)) return;
    running.add(job);
    try {
      const report = await runDelivery(job, delivery, { store, queue, pool }, { memory: run.memoryFor(job), signal });
      total.jobs++;
      total.points += job.points.length;
      total.cells += report.cells;
      total.failures += report.failures;
      run.onJob?.(job, (performance.now() - begun) / 1000);
    } catch (error) {
      run.onError?.(job, error);
      throw error;
    } finally {
      running.delete(job);
    }
  };

  const report = (): Promise<void> =>
    workers
      .report({
        ...identity,
        threads: pool.threads,
        state: signal.aborted ? 'draining' : 'working',
        jobs: total.jobs,
        points: total.points,
        current: [...running].map(({ sweep, points }) => ({ sweep, point: points[0].spec })),
      })
      // A registry that is away for a moment is told next time; the worker works on.
      .catch(() => undefined);

  const ended = new AbortController();
  const reporting = (async () => {
    while (!ended.signal.aborted) {
      await report();
      await pause(run.reportMs ?? REPORT_MS, ended.signal);
    }
  })();
  try {
    // Twice the threads, so that one job is stored while the next one is computed.
    const consumer = await queue.consume(handle, { concurrency: 2 * pool.threads });
    await aborted(signal);
    await Promise.all([report(), consumer.close(run.graceMs)]);
  } finally {
    ended.abort();
    await reporting;
    await workers.remove(identity.id).catch(() => undefined);
  }
  return total;
}

function aborted(signal: AbortSignal): Promise<void> {
  if (signal.aborted) return Promise.resolve();
  return new Promise((resolve) => signal.addEventListener('abort', () => resolve(), { once: true }));
}

/** Milliseconds that an answer about a sweep's state is good for. */
const STATE_MS = 1_000;

/** Asks the store, now and then, whether a sweep is to be stopped. A store that is away says nothing; the job will meet it anyway. */
function stopWatch(store: ResultStore): (sweep: string) => Promise<boolean> {
  const known = new Map<string, { readonly stopping: Promise<boolean>; readonly until: number }>();
  return (sweep) => {
    const now = performance.now();
    const last = known.get(sweep);
    if (last !== undefined && now < last.until) return last.stopping;
    const stopping = store.findSweep(sweep).then(
      (record) => record?.state === 'stopping',
      () => false,
    );
    known.set(sweep, { stopping, until: now + STATE_MS });
    return stopping;
  };
}
