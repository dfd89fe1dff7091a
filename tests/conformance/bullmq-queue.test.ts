import { afterAll, describe, it } from 'vitest';
import { openBullMqQueue, type BullMqQueue } from '../../src/queue/bullmq/bullmq-queue.js';
import { redisForTests } from '../support/redis.js';
import { jobQueueSuite } from './job-queue.suite.js';

const redis = await redisForTests();

if (redis === null) describe.skip('job queue: BullMQ', () => it('needs a Redis server', () => undefined));
else {
  afterAll(() => redis.stop());
  jobQueueSuite('BullMQ', async () => {
    const handles: BullMqQueue[] = [];
    const prefix = `${redis.prefix}-${String(Math.random()).slice(2)}`;
    return {
      async open() {
        const queue = await openBullMqQueue({ url: redis.url, prefix, methodVersion: 'sample-1' });
        handles.push(queue);
        return queue;
      },
      async clear() {
        await Promise.all(handles.map((queue) => queue.close()));
      },
    };
  });
}
