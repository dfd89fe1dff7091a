/** Measurements of a cluster: minutes long and one at a time, so they are neither tests nor part of `npm run bench`. */
import { defineConfig } from 'vitest/config';

export default defineConfig({
  root: new URL('../../..', import.meta.url).pathname,
  test: {
    include: ['tests/bench/cluster/*.measure.ts'],
    testTimeout: 1_800_000,
    hookTimeout: 120_000,
    pool: 'forks',
    fileParallelism: false,
    disableConsoleIntercept: true,
  },
});
