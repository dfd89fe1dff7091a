import { openInProcessQueue } from '../../src/queue/in-process/in-process-queue.js';
import { jobQueueSuite } from './job-queue.suite.js';

jobQueueSuite('in process', async () => {
  const queue = openInProcessQueue({ backoff: { firstMs: 2, ceilingMs: 10 } });
  return { open: async () => queue, clear: () => queue.close() };
});
