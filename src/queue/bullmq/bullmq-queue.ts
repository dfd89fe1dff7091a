/**
 * The job queue of a cluster: BullMQ on Redis.
 *
 * One BullMQ queue a lane and method version: a worker only ever sees jobs it can compute. Ended jobs leave nothing behind, so the same
 * content can be added again, and Redis holds what waits and runs and no more. The queue may lose everything at any moment; whoever
 * feeds it compares with the store.
 *
 * Order: about first in, first out within a lane. Concurrency: any number of processes may add and consume.
 *
 * @throws queue.unreachable, queue.full (both retryable), queue.refused, queue.version
 */
import { Queue } from 'bullmq';
import { WindrowError } from '../../core/errors.js';
import { METHOD_VERSION } from '../../sweep/identity.js';
import { checkVersion } from '../job-form.js';
import { laneOf, LANES, type Lane, type Lanes } from '../lanes.js';
import type { Job, JobQueue, WorkerRegistry } from '../types.js';
import { consumeLanes, type ConsumerTiming } from './consume-lanes.js';
import { asked, checkServer, connect, connectFirst, describeServer, type RedisServer } from './redis-connection.js';
import { redisWorkerRegistry } from './worker-registry.js';

export interface BullMqOptions extends RedisServer {
  /** begins every key of this cluster in Redis; default 'windrow' */
  readonly prefix?: string;
  /** all lanes of the cluster, the same for every process; LANES when absent */
  readonly lanes?: Lanes;
  /** those that `consume` takes jobs from; all when absent */
  readonly consumed?: readonly Lane[];
  /** jobs of this version are taken and added; this program's when absent */
  readonly methodVersion?: string;
  readonly timing?: Partial<ConsumerTiming>;
  /** what is unwise about the server, once at the start; and jobs that were set aside */
  readonly onWarning?: (text: string) => void;
}

export interface BullMqQueue extends JobQueue {
  readonly workers: WorkerRegistry;
  /** for messages; without a password */
  readonly where: string;
}

/** Deliveries of one job, the first included, where each ends with a retryable error; then the feeder finds it missing. */
const ATTEMPTS = 8;
const PREFIX = /^[\w{}.-]{1,100}$/;
/** Jobs in one transaction of Redis, which serves nobody else meanwhile. */
const CHUNK = 250;

/** Connects and checks the server. @throws settings.invalid and the errors named above */
export async function openBullMqQueue(options: BullMqOptions): Promise<BullMqQueue> {
  const { prefix = 'windrow', lanes = LANES, methodVersion = METHOD_VERSION, onWarning = () => undefined } = options;
  if (!PREFIX.test(prefix)) {
    throw new WindrowError('settings.invalid', 'the prefix of keys cannot be used', {
      where: 'redis-prefix',
      found: prefix,
      allowed: 'letters, digits, and _ - . { }, at most 100',
    });
  }
  const where = describeServer(options);
  const client = connect(options, 'a-moment');
  await connectFirst(client, where);
  try {
    for (const warning of await checkServer(client, where)) onWarning(warning);
  } catch (error) {
    client.disconnect();
    throw error;
  }
  const queues = new Map(lanes.map((lane) => [lane.name, openLane(lane)]));
  let open = true;

  function openLane(lane: Lane): Queue<Job> {
    const queue = new Queue<Job>(queueName(lane, methodVersion), {
      connection: client,
      prefix,
      defaultJobOptions: { attempts: ATTEMPTS, removeOnComplete: true, removeOnFail: true, stackTraceLimit: 1 },
      // Nobody reads the events; progress comes from the store.
      streams: { events: { maxLen: 10 } },
    });
    queue.on('error', () => undefined);
    return queue;
  }

  const ask = <T>(request: () => Promise<T>): Promise<T> => {
    if (!open) return Promise.reject(new WindrowError('queue.unreachable', 'the queue is closed', { where }));
    return asked(where, request);
  };

  return {
    where,
    workers: redisWorkerRegistry(client, prefix, where),
    async add(jobs) {
      for (const job of jobs) checkVersion(job, methodVersion);
      for (const [lane, queue] of queues) {
        const own = jobs.filter((job) => laneOf(job.memory, lanes).name === lane);
        for (let from = 0; from < own.length; from += CHUNK) {
          const entries = own.slice(from, from + CHUNK).map((job) => ({ name: job.sweep, data: job, opts: { jobId: jobKey(job.id) } }));
          await ask(() => queue.addBulk(entries));
        }
      }
      if (jobs.length === 0) await ask(() => Promise.resolve());
    },
    async depth() {
      const depths = await ask(() =>
        Promise.all([...queues.values()].map((queue) => queue.getJobCountByTypes('waiting', 'active', 'delayed', 'prioritized'))),
      );
      return depths.reduce((sum, depth) => sum + depth, 0);
    },
    consume: (handler, { concurrency }) =>
      ask(() =>
        consumeLanes(handler, {
          server: options,
          where,
          prefix,
          concurrency,
          methodVersion,
          onWarning,
          names: (options.consumed ?? lanes).map((lane) => queueName(lane, methodVersion)),
          ...(options.timing === undefined ? {} : { timing: options.timing }),
        }),
      ),
    async close() {
      if (!open) return;
      open = false;
      await Promise.all([...queues.values()].map((queue) => queue.close()));
      client.disconnect();
    },
  };
}

const queueName = (lane: Lane, methodVersion: string): string => `${lane.name}-${methodVersion.replaceAll(':', '-')}`;

/** BullMQ takes a name of digits for a number of its own; a digest may, in principle, be one. */
const jobKey = (id: string): string => `job-${id}`;
