/** A refined sweep on a real store: the boundary of a dense grid from few points, and what is left of it after an interruption. */
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { boundaryOf } from '../../src/analysis/boundary.js';
import { curvesOf } from '../../src/analysis/curves.js';
import { findQuantity } from '../../src/analysis/quantities.js';
import { samplesOf } from '../../src/analysis/samples.js';
import { refinementOf, wantedPlaces } from '../../src/cli/refine.js';
import { refineSweep } from '../../src/coordinator/refine-sweep.js';
import { resumeSweep } from '../../src/coordinator/resume-sweep.js';
import { runSweep } from '../../src/coordinator/run-sweep.js';
import type { SweepRun } from '../../src/coordinator/types.js';
import { openInProcessQueue } from '../../src/queue/in-process/in-process-queue.js';
import type { JobQueue } from '../../src/queue/types.js';
import type { ResultStore } from '../../src/store/types.js';
import { createDatabase, type TestDatabase } from '../support/database.js';
import { inlinePool } from '../support/inline-pool.js';
import { rowsOf, type SampleSweep, sweepOf } from '../support/sweeps.js';

const WIDTH = 0.005;
const choice = { quantity: findQuantity('effective_dimension'), rule: { kind: 'level', level: 2.5 }, words: '' } as const;

const junction = (name: string, count: number): SampleSweep =>
  sweepOf({
    name,
    model: 'bose-hubbard-dimer',
    size: [4, 6],
    coupling: { from: 1, to: 6, count, as: 'interaction-ratio' },
    prepare: 'all-left',
    schedules: [{ family: 'exponential', mean: 0.5 }],
    budget: 50,
  });

describe('refining a sweep', () => {
  let database: TestDatabase;
  let store: ResultStore;
  let queue: JobQueue;

  const runOf = (sweep: SampleSweep, changes: Partial<SweepRun> = {}): SweepRun => ({
    ...sweep,
    store,
    queue,
    pool: inlinePool(),
    memory: 2 ** 30,
    progressMs: 20,
    ...changes,
  });
  const refine = (run: SweepRun) => refineSweep(run, () => wantedPlaces(store, run.grid.name, choice, WIDTH));
  const bracketsOf = async (name: string) =>
    curvesOf(samplesOf(await rowsOf(store, name), choice.quantity), 'coupling').map((curve) => boundaryOf(curve, choice.rule).bracket!);

  beforeEach(async () => {
    database = await createDatabase();
    store = await database.open();
    queue = openInProcessQueue({ backoff: { firstMs: 1, ceilingMs: 5 } });
  });
  afterEach(async () => {
    await queue.close();
    await database.drop();
  });

  it('finds the boundary of the dense grid within the width, from at most a tenth of its points', async () => {
    const summary = await refine(runOf(junction('refined', 11)));
    // Half a unit to 0.005 are seven halvings at two sizes.
    expect(summary).toMatchObject({ outcome: 'done', points: 36, cells: 36, computed: 36, reused: 0, failed: 0 });
    expect(await refinementOf(store, 'refined', choice, WIDTH)).toEqual({
      width: WIDTH,
      grid_points: 22,
      refined_points: 14,
      dense_points: 2002,
      share: 36 / 2002,
      brackets: 2,
      wide_brackets: 0,
    });
    await runSweep(runOf(junction('dense', 1001)));
    const [refined, dense] = [await bracketsOf('refined'), await bracketsOf('dense')];
    expect(refined).toHaveLength(2);
    refined.forEach(({ low, high, estimate }, index) => {
      expect(high - low).toBeLessThanOrEqual(WIDTH);
      expect(Math.abs(estimate - dense[index].estimate)).toBeLessThan(WIDTH);
    });
  });

  it('gives a refined point the identity it has on an axis', async () => {
    await refine(runOf(junction('few', 11)));
    const points = await store.refinements('few');
    expect(points.map(({ ordinal }) => ordinal)).toEqual([...points.keys()].map((index) => 22 + index));
    const [{ id, coordinates }] = points;
    const axis = sweepOf({
      ...(junction('axis', 11).document as object),
      coupling: { values: [coordinates['coupling']], as: 'interaction-ratio' },
    });
    expect([...axis.grid.iterate()].map((point) => point.id)).toContain(id);
  });

  it('goes on where it was interrupted, and computes nothing a second time', async () => {
    const stop = new AbortController();
    let evaluated = 0;
    // Past the grid of 22 points, in the middle of the refinement.
    const pool = inlinePool(() => {
      evaluated++;
      if (evaluated === 27) stop.abort();
    });
    const first = await refine(runOf(junction('cut', 11), { pool, signal: stop.signal }));
    expect(first.outcome).toBe('interrupted');
    expect((await store.refinements('cut')).length).toBeLessThan(14);
    const again = await refine(
      runOf(junction('cut', 11), {
        pool: inlinePool(() => {
          evaluated++;
        }),
      }),
    );
    expect(again).toMatchObject({ outcome: 'done', points: 36, cells: 36 });
    expect(evaluated).toBe(36);
    expect(await wantedPlaces(store, 'cut', choice, WIDTH)).toEqual([]);
  });

  it('leaves a sweep that resumes, counts and reports its refined points like the others', async () => {
    await refine(runOf(junction('whole', 11)));
    expect(await store.progress('whole')).toMatchObject({ points: 36, cells: 36, storedPoints: 36, storedCells: 36 });
    const { grid: _grid, document: _document, ...run } = runOf(junction('whole', 11));
    expect(await resumeSweep('whole', run)).toMatchObject({ outcome: 'done', points: 36, computed: 0, reused: 36 });
    expect((await store.findSweep('whole'))?.points).toBe(22);
  });

  it('computes an enrolled point that nobody came to', async () => {
    const sweep = junction('left', 11);
    await runSweep(runOf(sweep));
    const other = junction('other', 13).grid.pointAt(1);
    await store.enrol('left', [{ ...other, ordinal: 22 }]);
    expect(await store.progress('left')).toMatchObject({ points: 23, cells: 23, storedCells: 22 });
    expect(await runSweep(runOf(sweep))).toMatchObject({ outcome: 'done', cells: 23, computed: 1, reused: 22 });
  });
});
