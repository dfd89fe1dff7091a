/** A small right sweep file as a plain value, for tests that change one part of it. */
import type { Json } from '../../src/core/json.js';

export type Mapping = { readonly [key: string]: Json };

export function smallSweep(changes: Mapping = {}): Mapping {
  return {
    name: 'small',
    model: 'bose-hubbard-dimer',
    size: { from: 2, to: 6, step: 2 },
    coupling: { from: 0.5, to: 2, count: 4, as: 'interaction-ratio' },
    prepare: 'all-left',
    schedules: [
      { family: 'exponential', mean: [0.25, 0.5] },
      { family: 'fixed', interval: 0.37 },
    ],
    budget: [10, 100],
    ...changes,
  };
}
