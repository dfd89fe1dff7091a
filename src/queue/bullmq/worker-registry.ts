/**
 * The registry of workers in Redis: one key a worker, which the server forgets by itself when the worker no longer reports. Ages are
 * taken from the time the key has left to live, so they follow the server's clock whatever the hosts' clocks say.
 */
import type { Redis } from 'ioredis';
import { z } from 'zod';
import type { WorkerRegistry, WorkerReport, WorkerSighting } from '../types.js';
import { asked } from './redis-connection.js';

/** Milliseconds after which a silent worker is forgotten; several times the pause between two reports. */
const REMEMBERED_MS = 60_000;

/** Other versions of windrow report here too: what this one needs must be there, more may be. */
const report = z.looseObject({
  id: z.string(),
  host: z.string(),
  pid: z.number(),
  threads: z.number(),
  memory: z.number(),
  lanes: z.array(z.string()),
  methodVersion: z.string(),
  state: z.enum(['working', 'draining']),
  started: z.string(),
  jobs: z.number(),
  points: z.number(),
  current: z.array(
    z.looseObject({ sweep: z.string(), point: z.looseObject({ model: z.string(), size: z.number(), coupling: z.number() }) }),
  ),
});

export function redisWorkerRegistry(client: Redis, prefix: string, where: string): WorkerRegistry {
  const members = `${prefix}:workers`;
  const keyOf = (id: string): string => `${prefix}:worker:${id}`;

  const list = async (): Promise<readonly WorkerSighting[]> => {
    const sightings: WorkerSighting[] = [];
    for (const id of await client.smembers(members)) {
      const [text, left] = await Promise.all([client.get(keyOf(id)), client.pttl(keyOf(id))]);
      const sighting = text === null ? null : readReport(text);
      if (sighting === null) await client.srem(members, id);
      else sightings.push({ ...sighting, age: Math.max(0, REMEMBERED_MS - left) / 1000 });
    }
    return sightings.sort((a, b) => a.host.localeCompare(b.host) || a.pid - b.pid);
  };

  return {
    report: (worker) =>
      asked(where, async () => {
        await client.set(keyOf(worker.id), JSON.stringify(worker), 'PX', REMEMBERED_MS);
        await client.sadd(members, worker.id);
      }),
    remove: (id) =>
      asked(where, async () => {
        await client.del(keyOf(id));
        await client.srem(members, id);
      }),
    list: () => asked(where, list),
  };
}

function readReport(text: string): WorkerReport | null {
  try {
    const parsed = report.safeParse(JSON.parse(text));
    return parsed.success ? (parsed.data as unknown as WorkerReport) : null;
  } catch {
    return null;
  }
}
