/**
 * Feeds a queue until nothing of a sweep is missing: walks the grid, lets the queue run empty, and walks again while the store still
 * misses something. So jobs whose results never arrive (a queue that lost its memory, a worker that died for good) are found by
 * comparing with the store and handed out again.
 */
import { WindrowError } from '../core/errors.js';
import { withRetry } from '../core/retry.js';
import type { SweepProgress } from '../store/types.js';
import { drainedTo, feed, type FeedOptions } from './feed.js';

const PATIENCE_MS = 300_000;
/** Walks in a row whose jobs may all end without a single new row. */
const FRUITLESS_WALKS = 3;

export interface FeedUntilCompleteOptions extends FeedOptions {
  /**
   * Milliseconds without a new row after which the store is compared again although the queue is not empty: it may hold other sweeps'
   * jobs only. A costly point that takes longer is handed out again meanwhile, which its queue knows to be the same job.
   */
  readonly patienceMs?: number | undefined;
  /** the last progress seen, by whoever follows it; null before the first look */
  readonly latest: () => SweepProgress | null;
  /** what went wrong with the last job that failed in this process, if that is known */
  readonly lastFault: () => Error | null;
}

/** @throws queue.incomplete, or the last fault, when jobs end again and again without storing anything */
export async function feedUntilComplete(options: FeedUntilCompleteOptions): Promise<void> {
  const { grid, store, queue, signal, lastFault } = options;
  const look = (): Promise<SweepProgress> => withRetry(() => store.progress(grid.name), { signal });
  let before = await look();
  for (let fruitless = 0; fruitless < FRUITLESS_WALKS;) {
    const jobs = await feed(options);
    if (jobs === 0 || signal.aborted) return;
    const ended = await drainedTo(queue, 0, signal, settledOrQuiet(options));
    if (signal.aborted) return;
    const after = await look();
    if (after.storedCells >= grid.cells) return;
    if (ended) fruitless = settled(after) > settled(before) ? 0 : fruitless + 1;
    before = after;
  }
  throw (
    lastFault() ??
    new WindrowError('queue.incomplete', `jobs of sweep '${grid.name}' end without storing results; look at the log of the workers`, {
      where: grid.name,
      found: `${before.storedCells} of ${grid.cells} cells`,
    })
  );
}

const settled = (progress: SweepProgress): number => progress.storedPoints + progress.storedCells + progress.failedPoints;

/**
 * Whether waiting for an empty queue can end early: everything seems settled, or nothing has happened for long. A failed point may
 * have some of its cells, so the count is a hint and the next walk decides.
 */
function settledOrQuiet({ grid, latest, patienceMs = PATIENCE_MS }: FeedUntilCompleteOptions): () => boolean {
  let seen = -1;
  let since = performance.now();
  return () => {
    const progress = latest();
    if (progress === null) return false;
    if (settled(progress) !== seen) {
      seen = settled(progress);
      since = performance.now();
    }
    const accounted = progress.storedCells + progress.failedPoints * grid.questions.length;
    return accounted >= grid.cells || performance.now() - since > patienceMs;
  };
}
