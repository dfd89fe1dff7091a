/**
 * The demo sweep through the whole path (queue, threads, statistics, PostgreSQL), on one thread and on all: cells a second, and where
 * the time of the jobs goes. Both runs belong to the same minute, so their ratio means something where nothing else runs; on a shared
 * machine cells per CPU second is the number to trust, which counts this process (threads included) and not the database. Needs the built program (`npm run bench` builds it).
 */
import { availableParallelism } from 'node:os';
import { fileURLToPath } from 'node:url';
import { bench, describe } from 'vitest';
import { runSweep } from '../../src/coordinator/run-sweep.js';
import type { SweepSummary } from '../../src/coordinator/types.js';
import type { Json } from '../../src/core/json.js';
import { openComputePool } from '../../src/queue/compute-pool.js';
import { openInProcessQueue } from '../../src/queue/in-process/in-process-queue.js';
import { expandGrid } from '../../src/sweep/grid.js';
import { readSweepFile } from '../../src/sweep/read-file.js';
import { createDatabase } from '../support/database.js';

const file = fileURLToPath(new URL('../../examples/double-well.yaml', import.meta.url));
const entry = fileURLToPath(new URL('../../dist/workers/compute.js', import.meta.url));
const once = { iterations: 1, time: 0, warmupIterations: 0, warmupTime: 0, throws: true };
const THREADS = [...new Set([1, availableParallelism()])];

async function sweep(threads: number): Promise<SweepSummary> {
  const document = readSweepFile(file);
  const database = await createDatabase();
  const pool = openComputePool({ entry, threads });
  const queue = openInProcessQueue();
  try {
    return await runSweep({
      grid: expandGrid(document),
      document: document as unknown as Json,
      store: await database.open(),
      queue,
      pool,
      memory: 2 ** 30,
    });
  } finally {
    await queue.close();
    await pool.close();
    await database.drop();
  }
}

/** e.g. 'threads 1: 105 cells/s, 118 cells per CPU second; kernel 1.0 %, statistics 88.0 %, store 11.0 % of 21.0 s in jobs' */
function account(threads: number, { computed, seconds, shares }: SweepSummary, cpu: number): string {
  const { kernel, statistics, store } = shares;
  const total = kernel + statistics + store;
  const percent = (part: number): string => `${((100 * part) / total).toFixed(1)} %`;
  const parts = `kernel ${percent(kernel)}, statistics ${percent(statistics)}, store ${percent(store)}`;
  const speed = `${(computed / seconds).toFixed(0)} cells/s, ${(computed / cpu).toFixed(0)} cells per CPU second`;
  return `threads ${threads}: ${speed}; ${parts} of ${total.toFixed(1)} s in jobs`;
}

/** User and system seconds of this process so far. */
function cpuSeconds(): number {
  const { user, system } = process.cpuUsage();
  return (user + system) / 1e6;
}

describe('demo sweep', () => {
  const rates = new Map<number, number>();
  for (const threads of THREADS) {
    bench(
      `threads ${threads}`,
      async () => {
        const before = cpuSeconds();
        const summary = await sweep(threads);
        rates.set(threads, summary.computed / summary.seconds);
        console.log(account(threads, summary, cpuSeconds() - before));
        const alone = rates.get(1);
        if (threads > 1 && alone !== undefined) {
          console.log(`${threads} threads against one: ${(rates.get(threads)! / alone).toFixed(2)} times the cells/s`);
        }
      },
      once,
    );
  }
});
