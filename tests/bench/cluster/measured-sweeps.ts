/** Two extremes: a sweep whose physics is nearly free, so that it takes what the path takes, and one that only computes. */
import type { SweepFile } from '../../support/cluster.js';

/** @param cells a multiple of 400: ten biases and four questions a coupling */
export const cheapSweep = (cells: number): SweepFile => ({
  name: `cheap-${cells}`,
  model: 'two-level',
  coupling: { from: 0.1, to: 3, count: cells / 40 },
  parameters: { bias: [0, 0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9] },
  prepare: 'up',
  schedules: [{ family: 'fixed', interval: [0.1, 0.2, 0.3, 0.4] }],
  budget: 100,
});

/** About one point a job: hundreds of jobs of tenths of a second. */
export const costlySweep = (name: string): SweepFile => ({
  name,
  model: 'bose-hubbard-dimer',
  size: [80, 100, 120],
  coupling: { from: 0.01, to: 0.06, count: 320 },
  prepare: 'all-left',
  schedules: [
    { family: 'exponential', mean: 0.25 },
    { family: 'fixed', interval: 0.25 },
  ],
  budget: 2000,
});
