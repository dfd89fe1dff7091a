/**
 * Takes jobs from lanes and hands them to a handler, at most so many at once over all lanes.
 *
 * Each job is under a lock that is renewed while its handler runs, which needs the event loop of this process to stay free. A process
 * that dies, freezes or is cut off loses its locks, and its jobs are delivered elsewhere; should it come back, its late
 * acknowledgements are refused by Redis and its rows are the same rows. A payload that is not a job is set aside in a short list for a
 * human to look at, and never delivered again.
 *
 * A job whose handler failed with a retryable error waits in this process before it goes back to the queue: a delay kept in Redis would
 * be counted by the hosts' clocks, which may differ by hours, and a worker that has lost its store should slow down anyway.
 */
import { UnrecoverableError, WaitingError, Worker, type Job as Parcel } from 'bullmq';
import type { WindrowError } from '../../core/errors.js';
import { backoffDelay, isRetryable, pause } from '../../core/retry.js';
import { checkVersion, parseJob } from '../job-form.js';
import type { Consumer, Delivery, Job } from '../types.js';
import { createAside, type Aside } from './aside.js';
import { connect, connectFirst, type RedisServer } from './redis-connection.js';
import { createSlots } from './slots.js';

export interface ConsumerTiming {
  /** milliseconds without renewal after which a job counts as lost */
  readonly lockMs: number;
  /** milliseconds between two searches for lost jobs */
  readonly searchMs: number;
}

/** A killed worker's jobs run again elsewhere after 9 to 11 seconds. */
export const TIMING: ConsumerTiming = { lockMs: 10_000, searchMs: 5_000 };

export interface ConsumeOptions {
  readonly server: RedisServer;
  readonly where: string;
  readonly prefix: string;
  readonly names: readonly string[];
  readonly concurrency: number;
  readonly methodVersion: string;
  readonly timing?: Partial<ConsumerTiming>;
  readonly onWarning: (text: string) => void;
}

/** Times a job may lose its worker. Far above what the handler allows itself, which splits or sets aside a job that kills. */
const MOST_LOSSES = 1000;
/** What a closing consumer allows Redis for the last acknowledgements before it lets go of the connection, milliseconds. */
const FAREWELL_MS = 2_000;

type Handler = (job: Job, delivery: Delivery) => Promise<void>;

export async function consumeLanes(handler: Handler, options: ConsumeOptions): Promise<Consumer> {
  const { lockMs, searchMs } = { ...TIMING, ...options.timing };
  const client = connect(options.server, 'for-ever');
  await connectFirst(client, options.where);
  /** aborted first: take nothing new and end pauses; then, when the grace is over: give back what runs */
  const closing = new AbortController();
  const abandoned = new AbortController();
  const aside = createAside(client, options.prefix, options.onWarning);
  const slots = createSlots(options.concurrency, closing.signal);

  const deliver = async (parcel: Parcel, token?: string): Promise<void> => {
    // A parcel put here by hand may ask to be kept when it has ended, and would then swallow every later job of its name.
    Object.assign(parcel.opts, { removeOnComplete: true, removeOnFail: true });
    const job = await opened(parcel, options, aside);
    const released = await slots.take();
    try {
      const ended = released === null ? 'abandoned' : await unlessAborted(handled(job, parcel, handler, closing.signal), abandoned.signal);
      if (ended !== 'abandoned') return;
    } finally {
      released?.();
    }
    // Where this fails, the lock runs out and the job is found lost.
    await parcel.moveToWait(token).catch(() => undefined);
    throw new WaitingError();
  };

  const workers = options.names.map((name) => {
    const worker = new Worker(name, deliver, {
      connection: client,
      prefix: options.prefix,
      concurrency: options.concurrency,
      lockDuration: lockMs,
      stalledInterval: searchMs,
      maxStalledCount: MOST_LOSSES,
    });
    worker.on('error', (error) => {
      // Lost connections and late acknowledgements: BullMQ goes on by itself. What it cannot even parse it would meet again and again.
      if (error instanceof SyntaxError) void aside.putUnreadable(worker).catch(() => undefined);
    });
    return worker;
  });
  await Promise.all(workers.map((worker) => worker.waitUntilReady()));

  let closed: Promise<void> | null = null;
  const close = async (graceMs?: number): Promise<void> => {
    closing.abort();
    const ended = Promise.all(workers.map((worker) => worker.close()));
    if (graceMs !== undefined) {
      const patience = new AbortController();
      const inTime = await Promise.race([ended.then(() => true), pause(graceMs, patience.signal).then(() => false)]);
      patience.abort();
      if (!inTime) {
        abandoned.abort();
        await Promise.race([ended, pause(FAREWELL_MS)]);
      }
    } else await ended;
    client.disconnect();
  };
  return {
    close(graceMs) {
      closed ??= close(graceMs);
      return closed;
    },
  };
}

/** The job in a parcel. @throws UnrecoverableError after setting aside what is none */
async function opened(parcel: Parcel, { methodVersion }: ConsumeOptions, aside: Aside): Promise<Job> {
  try {
    const job = parseJob(parcel.data);
    checkVersion(job, methodVersion);
    return job;
  } catch (error) {
    await aside.put(parcel.id ?? '', parcel.data, error as WindrowError);
    throw new UnrecoverableError((error as WindrowError).message);
  }
}

/** Runs the handler. A retryable failure is thrown on after a pause, so that BullMQ delivers the job again; any other ends the job. */
async function handled(job: Job, parcel: Parcel, handler: Handler, closing: AbortSignal): Promise<void> {
  try {
    await handler(job, { losses: parcel.stalledCounter });
  } catch (error) {
    const message = error instanceof Error ? error.message : String(error);
    if (!isRetryable(error)) throw new UnrecoverableError(message);
    await pause(backoffDelay(parcel.attemptsMade + 1), closing);
    throw error;
  }
}

function unlessAborted(work: Promise<void>, signal: AbortSignal): Promise<'ended' | 'abandoned'> {
  return new Promise((resolve, reject) => {
    const abandon = (): void => resolve('abandoned');
    if (signal.aborted) abandon();
    signal.addEventListener('abort', abandon, { once: true });
    work.then(() => resolve('ended'), reject).finally(() => signal.removeEventListener('abort', abandon));
  });
}
