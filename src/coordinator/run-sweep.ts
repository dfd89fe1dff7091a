/**
 * Runs a sweep to its end: registers it, hands out what is missing, follows it, and says what became of it.
 *
 * Guarantees:
 * - Only missing cells are computed; running a finished sweep again changes nothing, so resuming is running.
 * - One process at a time hands out a sweep's jobs (a named lock of the store). Any other follows, and takes over when the lock is free
 *   and something is still missing: every process may die, or run twice.
 * - A job whose results never arrive (a queue that lost its memory, a worker that died for good) is found by comparing with the store
 *   and handed out again.
 * - Aborting the signal, or the state 'stopping' in the store, drains: nothing new is handed out, and this process's running jobs are
 *   finished and stored.
 *
 * Written against JobQueue and ResultStore only, so it serves one machine and a cluster alike.
 *
 * @throws sweep.differs when the name is taken by another document or method version; queue.incomplete; errors of the store, the queue
 *         and the pool that outlast their retries
 */
import { WindrowError } from '../core/errors.js';
import { digest } from '../core/json.js';
import { isRetryable, pause, withRetry } from '../core/retry.js';
import type { Job } from '../queue/types.js';
import type { SweepProgress } from '../store/types.js';
import { METHOD_VERSION } from '../sweep/identity.js';
import type { Grid } from '../sweep/types.js';
import { drainedTo, feed } from './feed.js';
import { runJob } from './run-job.js';
import { trackProgress, type Tracker } from './track-progress.js';
import type { SweepRun, SweepStatus, SweepSummary } from './types.js';

const PROGRESS_MS = 250;
/** Pause of a follower between two attempts to take over. */
const FOLLOW_MS = 500;
/** Without a new row for this long, the store is compared again although the queue is not empty (with other sweeps' jobs, perhaps). */
const PATIENCE_MS = 300_000;
/** Walks in a row that may hand out jobs without a single new row. */
const FRUITLESS_WALKS = 3;

type Halt = 'interrupted' | 'stopped';

export async function runSweep(run: SweepRun): Promise<SweepSummary> {
  const { grid, store, pool } = run;
  const begun = performance.now();
  const seconds = (): number => (performance.now() - begun) / 1000;
  await register(run);

  // Why this run ends before its sweep does: a Halt, or the error that makes going on pointless.
  const halt = new AbortController();
  const interrupt = (): void => halt.abort('interrupted' satisfies Halt);
  if (run.signal?.aborted) interrupt();
  run.signal?.addEventListener('abort', interrupt, { once: true });

  const shares = { kernel: 0, statistics: 0, store: 0 };
  let phase: SweepStatus['phase'] = 'feeding';
  let reused = 0;
  let lastFault: Error | null = null;

  const tracker = trackProgress(store, grid.name, {
    intervalMs: run.progressMs ?? PROGRESS_MS,
    onProgress: (progress) =>
      run.onProgress?.({
        sweep: grid.name,
        phase: halt.signal.aborted ? 'draining' : phase,
        points: grid.points,
        cells: grid.cells,
        storedPoints: progress.storedPoints,
        storedCells: progress.storedCells,
        failedPoints: progress.failedPoints,
        reusedCells: reused,
        seconds: seconds(),
      }),
    onStopping: () => halt.abort('stopped' satisfies Halt),
    onError: (error) => halt.abort(error),
  });

  const handle = async (job: Job): Promise<void> => {
    if (pool === null) return;
    try {
      const report = await runJob(job, store, pool, { memory: run.memory });
      shares.kernel += report.seconds.kernel;
      shares.statistics += report.seconds.statistics;
      shares.store += report.seconds.store;
    } catch (error) {
      lastFault = asError(error);
      if (!isRetryable(error)) halt.abort(error);
      throw error;
    }
  };

  const feedToEnd = async (): Promise<boolean> => {
    phase = 'feeding';
    // Twice the threads, so that one job is stored while the next one is computed.
    const consumer = pool === null ? null : await run.queue.consume(handle, { concurrency: 2 * pool.threads });
    try {
      const counted = (cells: number): void => void (reused += cells);
      await feedUntilComplete(run, tracker, halt.signal, counted, () => lastFault);
    } finally {
      await consumer?.close(run.graceMs);
    }
    return true;
  };

  try {
    while (!halt.signal.aborted) {
      if ((await store.withLock(`sweep ${grid.name}`, feedToEnd)) !== null) break;
      phase = 'following';
      await pause(FOLLOW_MS, halt.signal);
    }
  } finally {
    run.signal?.removeEventListener('abort', interrupt);
    await tracker.close();
  }

  const outcome = endOf(halt.signal);
  const progress = await withRetry(() => store.progress(grid.name));
  if (outcome === 'done') await withRetry(() => store.setSweepState(grid.name, 'done'));
  return {
    sweep: grid.name,
    outcome,
    points: grid.points,
    cells: grid.cells,
    computed: Math.max(0, progress.storedCells - reused),
    reused,
    failed: progress.failedPoints,
    failures: progress.failures,
    seconds: seconds(),
    shares,
  };
}

/** Registers the sweep (again) and opens it. */
async function register({ grid, document, store, retryFailed }: SweepRun): Promise<void> {
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
  if (record.methodVersion !== METHOD_VERSION) {
    throw new WindrowError('sweep.differs', `sweep '${grid.name}' was computed by another version of windrow; give this one another name`, {
      where: grid.name,
      found: `method version ${record.methodVersion}`,
      allowed: METHOD_VERSION,
    });
  }
  if (retryFailed === true) await withRetry(() => store.clearFailures(grid.name));
  if (record.state !== 'open') await withRetry(() => store.setSweepState(grid.name, 'open'));
}

/** Walks the grid, lets the queue run empty, and walks again while the store still misses something. */
async function feedUntilComplete(
  { grid, store, queue, pool, window, jobPoints }: SweepRun,
  tracker: Tracker,
  signal: AbortSignal,
  onReused: (cells: number) => void,
  lastFault: () => Error | null,
): Promise<void> {
  let before = await withRetry(() => store.progress(grid.name), { signal });
  for (let walk = 1, fruitless = 0; !signal.aborted; walk++) {
    const jobs = await feed({
      grid,
      store,
      queue,
      signal,
      jobPoints,
      window: window ?? (pool === null ? 64 : 8 * pool.threads),
      ...(walk === 1 ? { onReused } : {}),
    });
    if (jobs === 0 || signal.aborted) return;
    await drainedTo(queue, 0, signal, settledOrQuiet(tracker, grid));
    if (signal.aborted) return;
    const after = await withRetry(() => store.progress(grid.name), { signal });
    if (after.storedCells >= grid.cells) return;
    fruitless = settled(after) > settled(before) ? 0 : fruitless + 1;
    before = after;
    if (fruitless < FRUITLESS_WALKS) continue;
    throw (
      lastFault() ??
      new WindrowError('queue.incomplete', `jobs of sweep '${grid.name}' end without storing results; look at the log of the workers`, {
        where: grid.name,
        found: `${after.storedCells} of ${grid.cells} cells`,
      })
    );
  }
}

const settled = (progress: SweepProgress): number => progress.storedPoints + progress.storedCells + progress.failedPoints;

/**
 * Whether waiting for an empty queue can end early: everything seems settled, or nothing has happened for long. A failed point may
 * have some of its cells, so the count is a hint and the next walk decides.
 */
function settledOrQuiet(tracker: Tracker, grid: Grid): () => boolean {
  let seen = -1;
  let since = performance.now();
  return () => {
    const progress = tracker.latest();
    if (progress === null) return false;
    if (settled(progress) !== seen) {
      seen = settled(progress);
      since = performance.now();
    }
    const accounted = progress.storedCells + progress.failedPoints * grid.questions.length;
    return accounted >= grid.cells || performance.now() - since > PATIENCE_MS;
  };
}

/** @throws the error that halted the run, if one did */
function endOf(signal: AbortSignal): SweepSummary['outcome'] {
  if (!signal.aborted) return 'done';
  const reason: unknown = signal.reason;
  if (reason === 'interrupted' || reason === 'stopped') return reason;
  throw asError(reason);
}

const asError = (thrown: unknown): Error => (thrown instanceof Error ? thrown : new Error(String(thrown)));
