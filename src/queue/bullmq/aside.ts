/**
 * The place for what is no job: a short list in Redis, newest first, for a human to look at (`LRANGE <prefix>:aside 0 -1`). Nothing in
 * it is ever delivered again.
 */
import { Job, type Worker } from 'bullmq';
import type { Redis } from 'ioredis';
import { WindrowError } from '../../core/errors.js';

export interface Aside {
  put(id: string, data: unknown, reason: WindrowError): Promise<void>;
  /** Takes away what a lane has handed out although its text cannot be parsed. */
  putUnreadable(lane: Worker): Promise<void>;
}

const KEPT = 100;

export function createAside(client: Redis, prefix: string, onWarning: (text: string) => void): Aside {
  const list = `${prefix}:aside`;

  const put = async (id: string, data: unknown, { code, message, details }: WindrowError): Promise<void> => {
    const where = details.where ?? '';
    onWarning(`set aside ${id} (${code}): ${message}${where === '' ? '' : ` at ${where}`}`);
    await client
      .multi()
      .lpush(list, JSON.stringify({ id, code, message, where, data }))
      .ltrim(list, 0, KEPT - 1)
      .exec();
  };

  return {
    put,
    async putUnreadable(lane) {
      const active = lane.toKey('active');
      for (const id of await client.lrange(active, 0, -1)) {
        if (await isReadable(lane, id)) continue;
        const key = lane.toKey(id);
        const stored = await client.hgetall(key);
        await client.multi().lrem(active, 0, id).srem(lane.toKey('stalled'), id).del(key, `${key}:lock`).exec();
        await put(id, stored, new WindrowError('queue.payload', 'a job whose text cannot be parsed'));
      }
    },
  };
}

async function isReadable(lane: Worker, id: string): Promise<boolean> {
  try {
    await Job.fromId(lane, id);
    return true;
  } catch (error) {
    return !(error instanceof SyntaxError);
  }
}
