/**
 * The pool of compute threads.
 *
 * Guarantees: `run` resolves with one outcome for each task, in order. A thread that dies (its heap limit, an exit) takes nothing with
 * it but its own bundle: the bundle is halved until the guilty point stands alone, the others are computed, and a point that has ended
 * its thread twice while alone becomes a failure `point.too-large`. Threads start with the first bundle and end with `close`.
 *
 * The heap limit of a thread holds for JavaScript objects; typed arrays and WebAssembly memory live outside it and are limited by the
 * estimate that is made before a point is built (EvaluateOptions.memory).
 */
import { existsSync } from 'node:fs';
import { Piscina } from 'piscina';
import { WindrowError } from '../core/errors.js';
import type { EvaluateOptions, PointOutcome, PointTask } from '../sweep/types.js';
import type { ComputePool } from './types.js';

/** The message to the compute entry. */
export interface ComputeRequest {
  readonly tasks: readonly PointTask[];
  readonly options: EvaluateOptions;
}

export interface ComputePoolOptions {
  /** path of the compiled compute entry, which exports `evaluateTasks` */
  readonly entry: string;
  readonly threads: number;
  /** bytes of heap a thread may use; the engine's default when absent */
  readonly heap?: number;
}

/** Below this a thread may not even load its code. */
const LEAST_HEAP_MIB = 64;
/** Deaths alone after which a point is set aside. */
const DEATHS = 2;

/** @throws internal.invariant when the entry does not exist */
export function openComputePool({ entry, threads, heap }: ComputePoolOptions): ComputePool {
  if (!existsSync(entry))
    throw new WindrowError('internal.invariant', 'the compute entry is missing: build the program first', { where: entry });
  let piscina: Piscina<ComputeRequest, readonly PointOutcome[]> | null = null;
  let open = true;

  const start = (): Piscina<ComputeRequest, readonly PointOutcome[]> => {
    const pool = new Piscina<ComputeRequest, readonly PointOutcome[]>({
      filename: entry,
      name: 'evaluateTasks',
      minThreads: threads,
      maxThreads: threads,
      ...(heap === undefined ? {} : { resourceLimits: { maxOldGenerationSizeMb: Math.max(LEAST_HEAP_MIB, Math.ceil(heap / 2 ** 20)) } }),
    });
    // A thread that dies between two bundles is replaced; there is nobody to tell.
    pool.on('error', () => undefined);
    return pool;
  };

  const run = async (tasks: readonly PointTask[], options: EvaluateOptions, deaths = 0): Promise<readonly PointOutcome[]> => {
    if (tasks.length === 0) return [];
    if (!open) throw new WindrowError('internal.invariant', 'the compute pool is closed');
    try {
      // Stored measures are copied, not moved: the bundle may have to be run again.
      return await (piscina ??= start()).run({ tasks, options });
    } catch (error) {
      if (!open || !isThreadDeath(error)) throw error;
      if (tasks.length > 1) {
        const half = Math.ceil(tasks.length / 2);
        const halves = await Promise.all([run(tasks.slice(0, half), options), run(tasks.slice(half), options)]);
        return halves.flat();
      }
      return deaths + 1 < DEATHS ? run(tasks, options, deaths + 1) : [setAside(tasks[0], error)];
    }
  };

  return {
    threads,
    run: (tasks, options) => run(tasks, options),
    /** Ends the threads at once; bundles still running are rejected. */
    async close() {
      open = false;
      await piscina?.destroy();
    },
  };
}

function isThreadDeath(error: unknown): boolean {
  if (!(error instanceof Error)) return false;
  return (error as NodeJS.ErrnoException).code === 'ERR_WORKER_OUT_OF_MEMORY' || error.message.startsWith('worker exited with code');
}

function setAside(task: PointTask, error: unknown): PointOutcome {
  const reason = (error as NodeJS.ErrnoException).code === 'ERR_WORKER_OUT_OF_MEMORY' ? 'ran out of memory' : (error as Error).message;
  return {
    point: null,
    cells: [],
    failure: {
      id: task.id,
      spec: task.spec,
      code: 'point.too-large',
      message: `the point ended its compute thread ${DEATHS} times (${reason}); allow more memory or fewer threads and retry`,
    },
    seconds: { kernel: 0, statistics: 0 },
  };
}
