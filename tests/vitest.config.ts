import { availableParallelism } from 'node:os';
import { defineConfig } from 'vitest/config';

export default defineConfig({
  root: new URL('..', import.meta.url).pathname,
  test: {
    include: ['tests/**/*.test.ts'],
    benchmark: { include: ['tests/bench/**/*.bench.ts'] },
    globalSetup: ['tests/support/global-setup.ts'],
    setupFiles: ['tests/support/property-seed.ts'],
    testTimeout: 60_000,
    hookTimeout: 120_000,
    pool: 'forks',
    // As many files at once as there are processors; the runner would keep one back for itself.
    maxWorkers: availableParallelism(),
  },
});
