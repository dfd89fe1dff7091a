/**
 * Follows a sweep in the store: progress reports at a steady pace, and the wish to stop.
 *
 * The store is the only source, so every process that looks at a sweep sees the same numbers, whoever computes. A look at a large sweep
 * takes time: the pause between two is at least ten times what the last one took.
 */
import { pause, withRetry } from '../core/retry.js';
import type { ResultStore, SweepProgress } from '../store/types.js';

export interface Tracker {
  /** the last numbers seen; null before the first look */
  latest(): SweepProgress | null;
  /** Ends the following; resolves when no query is running. */
  close(): Promise<void>;
}

export interface TrackOptions {
  readonly intervalMs: number;
  readonly onProgress: (progress: SweepProgress) => void;
  /** the sweep's state in the store has become 'stopping' */
  readonly onStopping: () => void;
  readonly onError: (error: unknown) => void;
}

export function trackProgress(store: ResultStore, sweep: string, options: TrackOptions): Tracker {
  const ended = new AbortController();
  let latest: SweepProgress | null = null;

  const look = async (): Promise<void> => {
    const [progress, record] = await Promise.all([store.progress(sweep), store.findSweep(sweep)]);
    latest = progress;
    if (ended.signal.aborted) return;
    options.onProgress(progress);
    if (record?.state === 'stopping') options.onStopping();
  };

  const follow = async (): Promise<void> => {
    while (!ended.signal.aborted) {
      const begun = performance.now();
      await withRetry(look, { signal: ended.signal });
      await pause(Math.max(options.intervalMs, 10 * (performance.now() - begun)), ended.signal);
    }
  };

  const following = follow().catch((error: unknown) => {
    if (!ended.signal.aborted) options.onError(error);
  });
  return {
    latest: () => latest,
    async close() {
      ended.abort();
      await following;
    },
  };
}
