/**
 * Refining a sweep: runs it, asks where points are wanted now that results are there, enrols them, and runs it again until none are.
 *
 * Guarantees: what is enrolled is part of the sweep, so any run of it computes what is missing, here or on a cluster; which points are
 * wanted is asked of stored rows only, so an interrupted refinement goes on where it ended. Two processes that refine a sweep at once
 * do no harm: a point that loses its place to another is asked for again.
 *
 * @throws whatever `runSweep` throws
 */
import { withRetry } from '../core/retry.js';
import type { SweepDocument } from '../sweep/document.js';
import { type RefinedPlace, refinedPoints } from '../sweep/refined-grid.js';
import { runSweep } from './run-sweep.js';
import type { SweepRun, SweepSummary } from './types.js';

/** @param wanted places without a point yet; none when the refinement is complete */
export async function refineSweep(run: SweepRun, wanted: () => Promise<readonly RefinedPlace[]>): Promise<SweepSummary> {
  const { grid, store } = run;
  const document = run.document as unknown as SweepDocument;
  let summary = await runSweep(run);
  const { reused } = summary;
  let { seconds } = summary;
  const shares = { ...summary.shares };
  while (summary.outcome === 'done' && run.signal?.aborted !== true) {
    const places = await wanted();
    if (places.length === 0) break;
    const known = await withRetry(() => store.refinements(grid.name));
    let next = known.reduce((above, { ordinal }) => Math.max(above, ordinal + 1), grid.points);
    const points = places.flatMap((place) => {
      const made = refinedPoints(document, place, next);
      next += made.length;
      return made;
    });
    await withRetry(() => store.enrol(grid.name, points));
    summary = await runSweep({ ...run, retryFailed: false });
    seconds += summary.seconds;
    for (const part of ['kernel', 'statistics', 'store'] as const) shares[part] += summary.shares[part];
  }
  const outcome = run.signal?.aborted === true ? 'interrupted' : summary.outcome;
  const computed = Math.max(0, summary.computed + summary.reused - reused);
  return { ...summary, outcome, computed, reused, seconds, shares };
}
