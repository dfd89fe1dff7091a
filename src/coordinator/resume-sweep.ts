/** Resuming: the stored document of a sweep, run again. Only what is missing is computed. */
import { WindrowError } from '../core/errors.js';
import { withRetry } from '../core/retry.js';
import { expandGrid } from '../sweep/grid.js';
import { documentFromJson } from '../sweep/read.js';
import { runSweep } from './run-sweep.js';
import type { SweepRun, SweepSummary } from './types.js';

/**
 * @throws sweep.unknown when the store holds no sweep of that name; whatever `runSweep` throws
 */
export async function resumeSweep(name: string, run: Omit<SweepRun, 'grid' | 'document'>): Promise<SweepSummary> {
  const record = await withRetry(() => run.store.findSweep(name));
  if (record === null) {
    const known = (await run.store.listSweeps()).map((sweep) => sweep.name);
    throw new WindrowError('sweep.unknown', `the store holds no sweep '${name}'`, {
      found: name,
      allowed: known.length === 0 ? 'none yet: run a sweep first' : known.join(', '),
    });
  }
  return runSweep({ ...run, grid: expandGrid(documentFromJson(record.document)), document: record.document });
}
