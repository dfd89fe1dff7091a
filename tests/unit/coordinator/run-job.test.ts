import { describe, expect, it } from 'vitest';
import { runJob } from '../../../src/coordinator/run-job.js';
import type { ComputePool } from '../../../src/queue/types.js';
import type { ResultStore } from '../../../src/store/types.js';
import { METHOD_VERSION } from '../../../src/sweep/identity.js';
import { sampleJob } from '../../support/jobs.js';

describe('runJob', () => {
  it('refuses a job of another method version before it touches anything', async () => {
    const untouchable = new Proxy({}, { get: () => expect.unreachable('nothing may be used') });
    const job = { ...sampleJob(1), methodVersion: 'w0-other' };
    await expect(runJob(job, untouchable as ResultStore, untouchable as ComputePool, { memory: 1e9 })).rejects.toMatchObject({
      code: 'queue.version',
      retryable: false,
      details: { found: 'w0-other', allowed: METHOD_VERSION },
    });
  });
});
