/** A compute thread that runs out of memory takes nothing with it but the point that did it. */
import { fileURLToPath } from 'node:url';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { runSweep } from '../../src/coordinator/run-sweep.js';
import type { SweepSummary } from '../../src/coordinator/types.js';
import { openComputePool } from '../../src/queue/compute-pool.js';
import { openInProcessQueue } from '../../src/queue/in-process/in-process-queue.js';
import type { ComputePool } from '../../src/queue/types.js';
import type { ResultStore } from '../../src/store/types.js';
import { createDatabase, type TestDatabase } from '../support/database.js';
import { inlinePool } from '../support/inline-pool.js';
import { doubleWell, rowsOf } from '../support/sweeps.js';

const pathOf = (entry: string): string => fileURLToPath(new URL(entry, import.meta.url));
const threads = (entry: string): ComputePool => openComputePool({ entry: pathOf(entry), threads: 2, heap: 64 * 2 ** 20 });

describe('a thread that runs out of memory', () => {
  let database: TestDatabase;
  let store: ResultStore;

  beforeEach(async () => {
    database = await createDatabase();
    store = await database.open();
  });
  afterEach(() => database.drop());

  /** The deadly coupling 1.5 is one of the twenty, at each of the four sizes. */
  const run = async (pool: ComputePool, into = store, retryFailed = false): Promise<SweepSummary> => {
    const queue = openInProcessQueue();
    try {
      return await runSweep({ ...doubleWell('memory'), store: into, queue, pool, memory: 2 ** 30, jobPoints: 10, retryFailed });
    } finally {
      await queue.close();
      await pool.close();
    }
  };

  it('costs only the guilty points; tried again elsewhere, all rows are those of an undisturbed run', async () => {
    const summary = await run(threads('../support/dying-entry.mjs'));
    expect(summary).toMatchObject({ outcome: 'done', failed: 4, computed: 152 });
    expect(summary.failures.map(({ code }) => code)).toEqual(['point.too-large']);
    expect(summary.failures[0].message).toContain('ran out of memory');
    const failed = (await rowsOf(store, 'memory')).filter(({ failure }) => failure !== null);
    expect(failed.map(({ spec }) => [spec.size, spec.coupling])).toEqual(
      [2, 4, 6, 8].flatMap((size) => [
        [size, 1.5],
        [size, 1.5],
      ]),
    );

    expect(await run(threads('../../dist/workers/compute.js'), store, true)).toMatchObject({ failed: 0, computed: 8, reused: 152 });
    const other = await createDatabase();
    try {
      const undisturbed = await other.open();
      await run(inlinePool(), undisturbed);
      expect(await rowsOf(store, 'memory')).toEqual(await rowsOf(undisturbed, 'memory'));
    } finally {
      await other.drop();
    }
  }, 300_000);
});
