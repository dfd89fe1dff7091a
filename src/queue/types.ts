/**
 * The job queue and the compute pool: where work waits and where it is done.
 *
 * The queue delivers every job at least once and holds nothing that the store and the sweep file cannot rebuild; losing it costs time,
 * never results. A job is a bundle of points with the ids of their open questions; specs travel with it so that a worker needs only the
 * queue and the store.
 */
import type { EvaluateOptions, PointOutcome, PointSpec, PointTask, QuestionRecord } from '../sweep/types.js';

export interface Job {
  /** digest of the content, so that adding a job twice is one job */
  readonly id: string;
  readonly sweep: string;
  readonly methodVersion: string;
  readonly questions: readonly QuestionRecord[];
  readonly points: readonly {
    readonly id: string;
    readonly spec: PointSpec;
    readonly measured: boolean;
    /** indices into `questions` */
    readonly open: readonly number[];
  }[];
  /** estimated bytes of the costliest point */
  readonly memory: number;
  /** estimated floating-point operations */
  readonly cost: number;
}

/** What the queue knows about a delivery. */
export interface Delivery {
  /** workers that were lost (killed, frozen, cut off) while they ran this job */
  readonly losses: number;
}

export interface Consumer {
  /** Takes no new job; resolves when running ones have ended. After `graceMs` they are abandoned (and delivered again elsewhere). */
  close(graceMs?: number): Promise<void>;
}

export interface JobQueue {
  /** Resolves when the jobs are accepted. An id that is waiting or running is not added again. @throws queue.full, queue.unreachable */
  add(jobs: readonly Job[]): Promise<void>;
  /** Jobs waiting and running. */
  depth(): Promise<number>;
  /** Calls `handler` for each job, at most `concurrency` at once. A rejected handler has its job delivered again if the error is retryable. */
  consume(handler: (job: Job, delivery: Delivery) => Promise<void>, options: { readonly concurrency: number }): Promise<Consumer>;
  close(): Promise<void>;
}

/** A worker as it reports itself. */
export interface WorkerReport {
  readonly id: string;
  readonly host: string;
  readonly pid: number;
  readonly threads: number;
  /** bytes each thread may use */
  readonly memory: number;
  readonly lanes: readonly string[];
  readonly methodVersion: string;
  readonly state: 'working' | 'draining';
  /** ISO 8601, by the worker's clock */
  readonly started: string;
  /** since the start */
  readonly jobs: number;
  readonly points: number;
  /** the first points of the jobs it runs now */
  readonly current: readonly { readonly sweep: string; readonly point: PointSpec }[];
}

/** A worker as others see it. */
export interface WorkerSighting extends WorkerReport {
  /** seconds since its last report, by the registry's clock */
  readonly age: number;
}

/** Who is alive. A worker that stops reporting is forgotten after a while. */
export interface WorkerRegistry {
  report(worker: WorkerReport): Promise<void>;
  remove(id: string): Promise<void>;
  list(): Promise<readonly WorkerSighting[]>;
}

/** Runs evaluations on other threads; the caller's event loop stays free. */
export interface ComputePool {
  readonly threads: number;
  run(tasks: readonly PointTask[], options: EvaluateOptions): Promise<readonly PointOutcome[]>;
  close(): Promise<void>;
}
