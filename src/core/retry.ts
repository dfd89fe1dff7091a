/**
 * Waiting and trying again: the one policy for faults of the infrastructure.
 *
 * Only errors that say `retryable` are tried again; mathematical, input and programming errors pass through at once. Delays double up
 * to a ceiling, so a server that restarts is met again within seconds and one that stays away is not hammered.
 */
import { WindrowError } from './errors.js';

export interface Backoff {
  /** milliseconds before the first repetition */
  readonly firstMs: number;
  readonly ceilingMs: number;
}

export const BACKOFF: Backoff = { firstMs: 100, ceilingMs: 5_000 };

/** Delay in milliseconds before repetition `attempt` (1 = first). */
export function backoffDelay(attempt: number, { firstMs, ceilingMs }: Backoff = BACKOFF): number {
  return Math.min(ceilingMs, firstMs * 2 ** (attempt - 1));
}

export function isRetryable(error: unknown): boolean {
  return error instanceof WindrowError && error.retryable;
}

/** Resolves after `ms`, or at once when `signal` is aborted; never rejects. */
export function pause(ms: number, signal?: AbortSignal): Promise<void> {
  return new Promise((resolve) => {
    if (signal?.aborted) return resolve();
    const end = (): void => {
      clearTimeout(timer);
      signal?.removeEventListener('abort', end);
      resolve();
    };
    const timer = setTimeout(end, ms);
    signal?.addEventListener('abort', end, { once: true });
  });
}

export interface RetryOptions {
  /** calls in all, the first included */
  readonly attempts?: number;
  readonly backoff?: Backoff;
  /** ends the waiting: the last error is thrown */
  readonly signal?: AbortSignal | undefined;
}

/**
 * Calls `work` until it resolves. With the defaults a server may be away for about half a minute.
 * @throws the error of the last call, or the first that is not retryable
 */
export async function withRetry<T>(work: () => Promise<T>, options: RetryOptions = {}): Promise<T> {
  const { attempts = 12, backoff = BACKOFF, signal } = options;
  for (let attempt = 1; ; attempt++) {
    try {
      return await work();
    } catch (error) {
      if (!isRetryable(error) || attempt >= attempts || signal?.aborted) throw error;
      await pause(backoffDelay(attempt, backoff), signal);
    }
  }
}
