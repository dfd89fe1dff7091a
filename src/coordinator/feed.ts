/**
 * One walk over a grid: enrol, find what is missing, hand it out in jobs.
 *
 * Guarantees: a grid of any size is walked in chunks, nothing of it is kept; the queue holds at most a window of jobs, refilled when
 * half of it is done; the walk ends early, between two chunks or jobs, when `signal` is aborted. Points stored as failed are not handed
 * out. Walking twice is harmless.
 */
import { WindrowError } from '../core/errors.js';
import { pause, withRetry } from '../core/retry.js';
import type { Job, JobQueue } from '../queue/types.js';
import type { MissingPoint, ResultStore } from '../store/types.js';
import { METHOD_VERSION } from '../sweep/identity.js';
import type { Grid, GridPoint } from '../sweep/types.js';
import { createBundler } from './bundler.js';
import { pointCost } from './point-cost.js';

/** Points enrolled in one statement; 20 to 50 ms of hashing. */
const CHUNK = 1000;
/** Pause between two looks at a queue that is full enough; short against the time that half a window lasts. */
const LOOK_MS = 25;

export interface FeedOptions {
  readonly grid: Grid;
  readonly store: ResultStore;
  readonly queue: JobQueue;
  /** jobs waiting and running at most */
  readonly window: number;
  readonly jobPoints?: number | undefined;
  readonly signal: AbortSignal;
  /** cells that were already stored of the chunk that begins at `ordinal` */
  readonly onReused: (ordinal: number, cells: number) => void;
}

/** @returns number of jobs handed out; 0 for a complete walk means that nothing is missing */
export async function feed({ grid, store, queue, window, jobPoints, signal, onReused }: FeedOptions): Promise<number> {
  const bundler = createBundler({ sweep: grid.name, methodVersion: METHOD_VERSION, questions: grid.questions, jobPoints });
  const questions = new Map(grid.questions.map((question) => [question.id, question]));
  let jobs = 0;
  const hand = async (ready: readonly Job[]): Promise<void> => {
    jobs += await handOut(ready, queue, window, signal);
  };
  for (const chunk of chunks(grid)) {
    if (signal.aborted) return jobs;
    const missing = await withRetry(() => store.enrol(grid.name, chunk), { signal });
    onReused(chunk[0].ordinal, chunk.length * grid.questions.length - unanswered(chunk, missing));
    const specs = new Map(chunk.map(({ id, spec }) => [id, spec]));
    for (const point of missing) {
      const spec = specs.get(point.id);
      // A second place of the grid with the same content needs no second job.
      if (spec === undefined || point.failure !== null) continue;
      specs.delete(point.id);
      const open = point.questionIds.flatMap((id) => questions.get(id) ?? []);
      const complete = bundler.push(point, spec, pointCost(spec, point.measured, open));
      if (complete.length > 0) await hand(complete);
    }
    // Where little is missing, a bundle takes long to fill: nobody shall wait for it with idle hands.
    if ((await withRetry(() => queue.depth(), { signal })) === 0) await hand(bundler.flush());
  }
  await hand(bundler.flush());
  return jobs;
}

/** Cells of the chunk without an answer; a point that stands at several places of the grid counts at each. */
function unanswered(chunk: readonly GridPoint[], missing: readonly MissingPoint[]): number {
  const open = new Map(missing.map(({ id, questionIds }) => [id, questionIds.length]));
  return chunk.reduce((cells, { id }) => cells + (open.get(id) ?? 0), 0);
}

function* chunks(grid: Grid): Generator<readonly GridPoint[]> {
  let chunk: GridPoint[] = [];
  for (const point of grid.iterate()) {
    chunk.push(point);
    if (chunk.length < CHUNK) continue;
    yield chunk;
    chunk = [];
  }
  if (chunk.length > 0) yield chunk;
}

/** Adds jobs as the window allows. Filling goes on up to the window, then waits until half of it is done. */
async function handOut(jobs: readonly Job[], queue: JobQueue, window: number, signal: AbortSignal): Promise<number> {
  let added = 0;
  while (added < jobs.length && !signal.aborted) {
    const depth = await withRetry(() => queue.depth(), { signal });
    if (depth >= window) {
      await drainedTo(queue, Math.floor(window / 2), signal);
      continue;
    }
    const next = jobs.slice(added, added + window - depth);
    try {
      await withRetry(() => queue.add(next), { signal });
      added += next.length;
    } catch (error) {
      // Full with other feeders' jobs for longer than a retry lasts: a queue is allowed to be busy.
      if (!(error instanceof WindrowError && error.code === 'queue.full')) throw error;
    }
  }
  return added;
}

/** Waits until the queue holds at most `depth` jobs, then true; false where `until` or the signal ended the waiting. */
export async function drainedTo(queue: JobQueue, depth: number, signal: AbortSignal, until?: () => boolean): Promise<boolean> {
  while (!signal.aborted && until?.() !== true) {
    if ((await withRetry(() => queue.depth(), { signal })) <= depth) return true;
    await pause(LOOK_MS, signal);
  }
  return false;
}
