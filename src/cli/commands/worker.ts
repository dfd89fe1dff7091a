/** `windrow worker`: computes jobs of a cluster until it is told to end. */
import { randomUUID } from 'node:crypto';
import { hostname } from 'node:os';
import type { Command } from 'commander';
import { consumeJobs } from '../../../workers/consumer.js';
import { carryOn } from '../../coordinator/carry-on.js';
import { WindrowError } from '../../core/errors.js';
import { formatCount } from '../../report/format.js';
import { laneOf, lanesFor } from '../../queue/lanes.js';
import { METHOD_VERSION } from '../../sweep/identity.js';
import { CLUSTER_WINDOW, clusterLanes, memoryLimit, openCluster, openPool, openStore } from '../compose.js';
import { type Context, EXIT, type Io, say } from '../context.js';
import { computeOptions, verb } from '../options.js';
import { print } from '../print.js';
import { runVerb } from '../run-verb.js';

export function workerCommand(program: Command, io: Io): void {
  const command = computeOptions(verb(program, 'worker', 'compute jobs of a cluster (DATABASE_URL, REDIS_URL) until told to end'))
    .option('--lanes <lanes>', 'lanes of jobs to serve: small, large or small,large')
    .option('--grace <seconds>', 'time to finish what runs when told to end');
  command.action(
    runVerb<[], object>(io, { drains: true }, async (context) => {
      const { settings, log, signal } = context;
      const lanes = clusterLanes(settings);
      const memory = memoryLimit(settings);
      const consumed = lanesFor(memory, lanes, settings.lanes?.split(','));
      const queue = await openCluster(context, consumed);
      const store = await openStore(context);
      const pool = openPool(context);
      const names = consumed.map(({ name }) => name);
      const words = `${pool.threads} thread(s), lanes ${names.join(' and ')}, method ${METHOD_VERSION}`;
      say(context, `windrow: worker on ${hostname()}: ${words}; jobs from ${queue.where}`);

      const ended = new AbortController();
      signal.addEventListener('abort', () => ended.abort(), { once: true });
      const carrying = carryOn({
        store,
        queue,
        window: CLUSTER_WINDOW,
        signal: ended.signal,
        onSweep: (sweep, event) => log.info({ sweep }, `sweep ${event}`),
        onError: (sweep, error) => tell(context, error, sweep === null ? 'looking for open sweeps' : `carrying on sweep ${sweep}`),
      });
      try {
        const total = await consumeJobs({
          store,
          queue,
          pool,
          signal,
          workers: queue.workers,
          identity: {
            id: randomUUID(),
            host: hostname(),
            pid: process.pid,
            memory,
            lanes: names,
            methodVersion: METHOD_VERSION,
            started: new Date().toISOString(),
          },
          memoryFor: (job) => laneOf(job.memory, lanes).memory,
          graceMs: settings.grace * 1000,
          onJob: (job, seconds) => log.debug({ job: job.id, sweep: job.sweep, points: job.points.length, seconds }, 'job done'),
          onError: (job, error) => tell(context, error, `job of sweep ${job.sweep}`),
        });
        const row = { ...total };
        await print(context, {
          table: () =>
            `Worker ended: ${formatCount(row.jobs)} jobs, ${formatCount(row.points)} points, ${formatCount(row.cells)} cells, ${formatCount(row.failures)} failed points.`,
          json: () => row,
          csv: () => ({ columns: Object.keys(row), rows: [row] }),
        });
        return EXIT.done;
      } finally {
        ended.abort();
        await carrying;
      }
    }),
  );
}

function tell({ log }: Context, error: unknown, what: string): void {
  const code = error instanceof WindrowError ? error.code : 'internal.invariant';
  log.warn({ code, reason: error instanceof Error ? error.message : String(error) }, what);
}
