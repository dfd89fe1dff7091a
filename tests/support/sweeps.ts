/** Small sweeps for tests of whatever runs them: real physics, seconds at most. */
import type { Json } from '../../src/core/json.js';
import { normalise } from '../../src/sweep/document.js';
import { expandGrid } from '../../src/sweep/grid.js';
import type { CellRow, ResultStore } from '../../src/store/types.js';
import type { Grid } from '../../src/sweep/types.js';

export interface SampleSweep {
  readonly grid: Grid;
  readonly document: Json;
}

export const sweepOf = (file: Record<string, unknown>): SampleSweep => {
  const document = normalise(file);
  return { grid: expandGrid(document), document: document as unknown as Json };
};

/** A double well of N = 2 … 8 bosons, `couplings` interactions from `from` upwards, two schedules: 4 × couplings points. */
export function doubleWell(name: string, { couplings = 20, from = 0.5, schedules = 2 } = {}): SampleSweep {
  const all = [
    { family: 'exponential', mean: 0.5 },
    { family: 'fixed', interval: 0.37 },
    { family: 'gamma', mean: 0.4, shape: 2.5 },
  ];
  return sweepOf({
    name,
    model: 'bose-hubbard-dimer',
    size: [2, 4, 6, 8],
    coupling: Array.from({ length: couplings }, (_, index) => from + index / 16),
    prepare: 'all-left',
    schedules: all.slice(0, schedules),
    budget: 50,
  });
}

/** The rows of a sweep as they would be exported, without what tells one store or sweep from another. */
export async function rowsOf(store: ResultStore, sweep: string): Promise<readonly CellRow[]> {
  const rows: CellRow[] = [];
  for await (const row of store.cells({ sweep })) rows.push(row);
  return rows;
}
