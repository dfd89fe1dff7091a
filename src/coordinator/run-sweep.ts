/**
 * Runs a sweep to its end: registers it, hands out what is missing, follows it, and says what became of it.
 *
 * Guarantees:
 * - Points that a refinement added to the sweep belong to it like those of its grid.
 * - Only missing cells are computed; running a finished sweep again changes nothing, so resuming is running.
 * - One process at a time hands out a sweep's jobs (a named lock of the store). Any other follows, and takes over when the lock is free
 *   and something is still missing: every process may die, or run twice.
 * - Aborting the signal, or the state 'stopping' in the store, drains: nothing new is handed out, and this process's running jobs are
 *   finished and stored.
 *
 * Written against JobQueue and ResultStore only, so it serves one machine and a cluster alike.
 *
 * @throws sweep.differs when the name is taken by another document or method version; queue.incomplete; errors of the store, the queue
 *         and the pool that outlast their retries
 */
import { digest } from '../core/json.js';
import { isRetryable, pause, withRetry } from '../core/retry.js';
import type { ComputePool, Delivery, Job } from '../queue/types.js';
import type { SweepProgress } from '../store/types.js';
import { METHOD_VERSION } from '../sweep/identity.js';
import { refinedGrid } from '../sweep/refined-grid.js';
import { feedUntilComplete } from './feed-until-complete.js';
import { runDelivery } from './run-delivery.js';
import { trackProgress } from './track-progress.js';
import type { SweepRun, SweepStatus, SweepSummary } from './types.js';

const PROGRESS_MS = 250;
/** Pause of a follower between two attempts to take over. */
const FOLLOW_MS = 500;
/** Times a run starts over when the store or the queue was away for longer than a single call waits. */
const STARTS = 3;

/** Why a run ends before its sweep does; an Error where going on is pointless. */
type Halt = 'interrupted' | 'stopped' | Error;

export async function runSweep(run: SweepRun): Promise<SweepSummary> {
  const { store, queue, pool } = run;
  const begun = performance.now();
  await openSweep(run);
  const grid = refinedGrid(run.grid, await withRetry(() => store.refinements(run.grid.name)));

  const halted = new AbortController();
  const halt = (reason: Halt): void => halted.abort(reason);
  const interrupt = (): void => halt('interrupted');
  if (run.signal?.aborted) interrupt();
  run.signal?.addEventListener('abort', interrupt, { once: true });

  const shares = { kernel: 0, statistics: 0, store: 0 };
  const reused = reuseCounter();
  let phase: SweepStatus['phase'] = 'feeding';
  let lastFault: Error | null = null;

  const report = ({ storedPoints, storedCells, failedPoints }: SweepProgress): void =>
    run.onProgress?.({
      sweep: grid.name,
      phase: halted.signal.aborted ? 'draining' : phase,
      points: grid.points,
      cells: grid.cells,
      storedPoints,
      storedCells,
      failedPoints,
      reusedCells: reused.cells(),
      seconds: (performance.now() - begun) / 1000,
    });

  const tracker = trackProgress(store, grid.name, {
    intervalMs: run.progressMs ?? PROGRESS_MS,
    onProgress: report,
    onStopping: () => halt('stopped'),
    onError: (error) => halt(asError(error)),
  });

  const compute = async (job: Job, delivery: Delivery, threads: ComputePool): Promise<void> => {
    try {
      const { seconds } = await runDelivery(job, delivery, { store, queue, pool: threads }, { memory: run.memory });
      shares.kernel += seconds.kernel;
      shares.statistics += seconds.statistics;
      shares.store += seconds.store;
    } catch (error) {
      lastFault = asError(error);
      if (!isRetryable(error)) halt(lastFault);
      throw error;
    }
  };

  const feedToEnd = async (): Promise<true> => {
    phase = 'feeding';
    // Twice the threads, so that one job is stored while the next one is computed.
    const consumer =
      pool === null ? null : await queue.consume((job, delivery) => compute(job, delivery, pool), { concurrency: 2 * pool.threads });
    try {
      await feedUntilComplete({
        grid,
        store,
        queue,
        window: run.window ?? (pool === null ? 64 : 8 * pool.threads),
        jobPoints: run.jobPoints,
        patienceMs: run.patienceMs,
        signal: halted.signal,
        onReused: reused.count,
        latest: () => tracker.latest(),
        lastFault: () => lastFault,
      });
    } finally {
      await consumer?.close(run.graceMs);
    }
    return true;
  };

  try {
    const { signal } = halted;
    while (!signal.aborted) {
      if ((await withRetry(() => store.withLock(sweepLock(grid.name), feedToEnd), { attempts: STARTS, signal })) !== null) break;
      phase = 'following';
      await pause(FOLLOW_MS, signal);
    }
  } finally {
    run.signal?.removeEventListener('abort', interrupt);
    await tracker.close();
  }

  const reason = halted.signal.aborted ? (halted.signal.reason as Halt) : null;
  if (reason instanceof Error) throw reason;
  const progress = await withRetry(() => store.progress(grid.name));
  // A drain may have been all that was missing.
  const outcome = reason === null || progress.storedCells >= grid.cells ? 'done' : reason;
  if (outcome === 'done') await withRetry(() => store.setSweepState(grid.name, 'done'));
  report(progress);
  return {
    sweep: grid.name,
    outcome,
    points: grid.points,
    cells: grid.cells,
    computed: Math.max(0, progress.storedCells - reused.cells()),
    reused: reused.cells(),
    failed: progress.failedPoints,
    failures: progress.failures,
    seconds: (performance.now() - begun) / 1000,
    shares,
  };
}

/** Name of the lock that whoever hands out a sweep's jobs holds. */
export const sweepLock = (sweep: string): string => `sweep ${sweep}`;

/** Registers the sweep (again) and opens it; in a cluster any worker then carries it on. @throws sweep.differs */
export async function openSweep({
  grid,
  document,
  store,
  retryFailed,
}: Pick<SweepRun, 'grid' | 'document' | 'store' | 'retryFailed'>): Promise<void> {
  const record = await withRetry(() =>
    store.registerSweep({
      name: grid.name,
      digest: digest(document),
      document,
      methodVersion: METHOD_VERSION,
      points: grid.points,
      questions: grid.questions,
    }),
  );
  if (retryFailed === true) await withRetry(() => store.clearFailures(grid.name));
  if (record.state !== 'open') await withRetry(() => store.setSweepState(grid.name, 'open'));
}

/** Counts what was stored before the run came to it: each place of the grid at the first walk over it only. */
function reuseCounter(): { readonly count: (ordinal: number, cells: number) => void; readonly cells: () => number } {
  let cells = 0;
  let next = 0;
  return {
    count(ordinal, found) {
      if (ordinal < next) return;
      next = ordinal + 1;
      cells += found;
    },
    cells: () => cells,
  };
}

const asError = (thrown: unknown): Error => (thrown instanceof Error ? thrown : new Error(String(thrown)));
