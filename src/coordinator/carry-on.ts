/**
 * Carries on sweeps that nobody feeds: their process died, or let go of them on purpose.
 *
 * Every worker of a cluster runs this, so no process is the one that must not die. Sweeps that were stopped, are done, or belong to
 * another method version are left alone. Ends when `signal` is aborted.
 */
import { pause } from '../core/retry.js';
import type { JobQueue } from '../queue/types.js';
import type { ResultStore } from '../store/types.js';
import { METHOD_VERSION } from '../sweep/identity.js';
import { resumeSweep } from './resume-sweep.js';
import { sweepLock } from './run-sweep.js';

export interface CarryOnOptions {
  readonly store: ResultStore;
  readonly queue: JobQueue;
  /** jobs kept waiting and running */
  readonly window: number;
  readonly signal: AbortSignal;
  /** milliseconds between two looks; default 5,000 */
  readonly lookMs?: number;
  readonly onSweep?: (sweep: string, event: 'carried on' | 'ended') => void;
  readonly onError?: (sweep: string | null, error: unknown) => void;
}

const LOOK_MS = 5_000;
/** Progress is for people; here nobody looks. */
const PROGRESS_MS = 2_000;
/** Looks that a sweep is left alone after it ended in an error. */
const REST = 12;

export async function carryOn({ store, queue, window, signal, lookMs = LOOK_MS, onSweep, onError }: CarryOnOptions): Promise<void> {
  const fed = new Map<string, Promise<void>>();
  const resting = new Map<string, number>();

  const feed = async (sweep: string): Promise<void> => {
    onSweep?.(sweep, 'carried on');
    try {
      // The memory limit is that of the lanes, and held by the workers.
      await resumeSweep(sweep, { store, queue, pool: null, memory: Infinity, signal, window, progressMs: PROGRESS_MS });
    } catch (error) {
      resting.set(sweep, REST);
      onError?.(sweep, error);
    } finally {
      fed.delete(sweep);
      onSweep?.(sweep, 'ended');
    }
  };

  const look = async (): Promise<void> => {
    for (const { name, state, methodVersion } of await store.listSweeps()) {
      const rest = resting.get(name) ?? 0;
      if (rest > 0) resting.set(name, rest - 1);
      if (signal.aborted || state !== 'open' || methodVersion !== METHOD_VERSION || fed.has(name) || rest > 0) continue;
      const unattended = (await store.withLock(sweepLock(name), () => Promise.resolve(true))) === true;
      if (unattended) fed.set(name, feed(name));
    }
  };

  while (!signal.aborted) {
    await look().catch((error: unknown) => onError?.(null, error));
    await pause(lookMs, signal);
  }
  await Promise.all(fed.values());
}
