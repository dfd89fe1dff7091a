/** `windrow status --workers`: who computes in the cluster, and what. */
import type { Json } from '../core/json.js';
import { formatBytes, formatCount, formatSeconds } from '../report/format.js';
import { renderTable } from '../report/table.js';
import type { WorkerSighting } from '../queue/types.js';
import { openCluster } from './compose.js';
import { type Context, EXIT, type ExitStatus } from './context.js';
import { print } from './print.js';

function currentText({ current }: WorkerSighting): string {
  if (current.length === 0) return '–';
  const [{ sweep, point }, ...rest] = current;
  const more = rest.length > 0 ? ` and ${formatCount(rest.length)} more` : '';
  return `${sweep}: ${point.model} ${point.size}, coupling ${point.coupling}${more}`;
}

const COLUMNS = [
  'id',
  'host',
  'pid',
  'state',
  'threads',
  'memory',
  'lanes',
  'method_version',
  'started',
  'last_seen_seconds',
  'jobs',
  'points',
  'current',
] as const;

const rowOf = (worker: WorkerSighting): { readonly [key in (typeof COLUMNS)[number]]: string | number } => ({
  id: worker.id,
  host: worker.host,
  pid: worker.pid,
  state: worker.state,
  threads: worker.threads,
  memory: worker.memory,
  lanes: worker.lanes.join(' '),
  method_version: worker.methodVersion,
  started: worker.started,
  last_seen_seconds: worker.age,
  jobs: worker.jobs,
  points: worker.points,
  current: currentText(worker),
});

export async function showWorkers(context: Context): Promise<ExitStatus> {
  const workers = await (await openCluster(context)).workers.list();
  const rows = workers.map(rowOf);
  await print(context, {
    table: () =>
      workers.length === 0
        ? 'No worker is alive; start one with `windrow worker`.'
        : renderTable(workers, [
            { title: 'host', value: ({ host, pid }) => `${host} (${pid})` },
            { title: 'state', value: ({ state }) => state },
            { title: 'threads', value: ({ threads }) => formatCount(threads), align: 'right' },
            { title: 'memory a thread', value: ({ memory }) => formatBytes(memory), align: 'right' },
            { title: 'lanes', value: ({ lanes }) => lanes.join(', ') },
            { title: 'method', value: ({ methodVersion }) => methodVersion },
            { title: 'last seen', value: ({ age }) => `${formatSeconds(age)} ago`, align: 'right' },
            { title: 'points', value: ({ points }) => formatCount(points), align: 'right' },
            { title: 'computes', value: currentText },
          ]),
    json: () => workers.map((worker, index) => ({ ...rows[index], current: worker.current as unknown as Json })),
    csv: () => ({ columns: COLUMNS, rows }),
  });
  return EXIT.done;
}
