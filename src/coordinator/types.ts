/** What a caller hands to a sweep run, sees while it runs, and gets back. */
import type { Json } from '../core/json.js';
import type { ComputePool, JobQueue } from '../queue/types.js';
import type { ResultStore, SweepProgress } from '../store/types.js';
import type { Grid } from '../sweep/types.js';

export interface SweepRun {
  /** that of the sweep file; refined points are the store's to say */
  readonly grid: Grid;
  /** the normalised sweep document that `grid` was expanded from */
  readonly document: Json;
  readonly store: ResultStore;
  readonly queue: JobQueue;
  /** Threads of this process that take jobs from the queue; null where only other processes do. */
  readonly pool: ComputePool | null;
  /** bytes one evaluation may use */
  readonly memory: number;
  /** Forget the failures of this sweep's points first, so that they are computed again. */
  readonly retryFailed?: boolean;
  /** Aborting it drains: nothing new is handed out, what runs is finished and stored. */
  readonly signal?: AbortSignal;
  /** milliseconds a drain may take before running jobs are abandoned; unlimited when absent */
  readonly graceMs?: number;
  readonly onProgress?: (status: SweepStatus) => void;
  /** milliseconds between two progress reports, at least; default 250 */
  readonly progressMs?: number;
  /** points bundled into one job at most; default 250 */
  readonly jobPoints?: number;
  /** jobs kept waiting and running; default 8 for each thread, 64 without a pool */
  readonly window?: number;
  /** milliseconds without a new row after which lost jobs are looked for; default five minutes */
  readonly patienceMs?: number;
}

export interface SweepStatus {
  readonly sweep: string;
  /** 'following': another process hands out this sweep's jobs; 'draining': nothing new is handed out */
  readonly phase: 'feeding' | 'following' | 'draining';
  readonly points: number;
  readonly cells: number;
  readonly storedPoints: number;
  readonly storedCells: number;
  readonly failedPoints: number;
  /** cells that were answered before this run reached them */
  readonly reusedCells: number;
  /** seconds since the run began */
  readonly seconds: number;
}

export interface SweepSummary {
  readonly sweep: string;
  /** 'interrupted' by the signal, 'stopped' by the sweep's state in the store */
  readonly outcome: 'done' | 'interrupted' | 'stopped';
  readonly points: number;
  readonly cells: number;
  /** cells stored since this run began, here or by other processes */
  readonly computed: number;
  /** cells that were already stored when this run reached them */
  readonly reused: number;
  /** points stored as failed */
  readonly failed: number;
  readonly failures: SweepProgress['failures'];
  /** wall clock */
  readonly seconds: number;
  /** seconds spent by this process's jobs, summed over threads: spectral measures, statistics, reading and writing the store */
  readonly shares: { readonly kernel: number; readonly statistics: number; readonly store: number };
}
