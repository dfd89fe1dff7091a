/** Follow-up questions on a real store: what is computed from stored measures, stored, reused, and left alone. */
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { followUp, type FollowUp } from '../../src/coordinator/follow-up.js';
import { runSweep } from '../../src/coordinator/run-sweep.js';
import { openInProcessQueue } from '../../src/queue/in-process/in-process-queue.js';
import type { ComputePool } from '../../src/queue/types.js';
import type { ResultStore } from '../../src/store/types.js';
import { evaluatePoint } from '../../src/sweep/evaluate.js';
import { expandGrid } from '../../src/sweep/grid.js';
import { documentFromJson } from '../../src/sweep/read.js';
import { createDatabase, type TestDatabase } from '../support/database.js';
import { inlinePool } from '../support/inline-pool.js';
import { doubleWell, rowsOf, type SampleSweep, sweepOf } from '../support/sweeps.js';

const MEMORY = 2 ** 30;

/** Refuses to diagonalise: every task has to bring its measure. */
const onlyStored = (): ComputePool =>
  inlinePool(({ stored }) => {
    if (stored === null) throw new Error('a measure was computed');
  });

describe('a follow-up', () => {
  let database: TestDatabase;
  let store: ResultStore;
  beforeEach(async () => {
    database = await createDatabase();
    store = await database.open();
  });
  afterEach(() => database.drop());

  const sweep = async (sample: SampleSweep): Promise<void> => {
    const queue = openInProcessQueue();
    await runSweep({ ...sample, store, queue, pool: inlinePool(), memory: MEMORY });
    await queue.close();
  };
  const ask = (name: string, questions: FollowUp['questions'], changes: Partial<FollowUp> = {}) =>
    followUp({ sweep: name, questions, store, pool: onlyStored(), memory: MEMORY, ...changes });

  it('gives the cells that a sweep with these questions gives, without diagonalising, and computes them once', async () => {
    const small = doubleWell('asked', { couplings: 8, schedules: 1 });
    const large = doubleWell('whole', { couplings: 8, schedules: 3 });
    await sweep(small);
    const before = await store.progress('asked');
    const summary = await ask('asked', large.grid.questions.slice(1));
    expect(summary).toMatchObject({ outcome: 'done', cells: 64, computed: 64, measures: 32, stored: 0, unmeasured: 0, failures: [] });
    expect(summary.questions.map(({ ordinal }) => ordinal)).toEqual([1, 2]);
    expect(await ask('asked', large.grid.questions)).toMatchObject({ cells: 96, computed: 0, measures: 0, stored: 96 });
    expect(await store.progress('asked')).toEqual(before);

    const rows = await rowsOf(store, 'asked');
    expect(rows).toHaveLength(96);
    for (const row of rows) {
      const { id, spec } = large.grid.pointAt(row.ordinal);
      const alone = evaluatePoint({ id, spec, stored: null, questions: large.grid.questions }, { memory: MEMORY });
      expect(row.fields).toEqual(alone.cells[row.questionOrdinal].fields);
    }
    // A sweep of the same questions finds all of it.
    const queue = openInProcessQueue();
    expect(await runSweep({ ...large, store, queue, pool: onlyStored(), memory: MEMORY })).toMatchObject({ computed: 0, reused: 96 });
    // And resuming the first one stays what it was.
    expect(await runSweep({ ...small, store, queue, pool: onlyStored(), memory: MEMORY })).toMatchObject({
      cells: 32,
      computed: 0,
      reused: 32,
    });
    await queue.close();
  });

  it('of a detector with efficiency η gives <n> = (number of bright levels)/η for the return', async () => {
    await sweep(doubleWell('seen', { couplings: 3, schedules: 1 }));
    const blind = doubleWell('blind', { couplings: 3, schedules: 1 }).grid.questions.map(({ question }) => question);
    const document = (await store.findSweep('seen'))!.document as object;
    const { questions } = expandGrid(documentFromJson({ ...document, detector: { efficiency: 0.25 } }));
    expect(questions[0].question).toEqual({ ...blind[0], detector: { efficiency: 0.25 } });
    await ask('seen', questions);
    for (const { questionOrdinal, fields, point } of await rowsOf(store, 'seen')) {
      // Common practice: geometric clicks, each of the W returns is seen with probability η. Exact moments: 1e-9 relative.
      const expected = point!.bright_levels / (questionOrdinal === 0 ? 1 : 0.25);
      expect(Math.abs(fields!.mean_measurements! / expected - 1)).toBeLessThan(1e-9);
    }
  });

  it('is restricted to the places that are asked for, and goes on from there', async () => {
    await sweep(doubleWell('part', { couplings: 4, schedules: 1 }));
    const questions = doubleWell('more', { couplings: 4, schedules: 2 }).grid.questions.slice(1);
    const places = { wanted: ({ spec }: { spec: { size: number } }) => spec.size === 4, count: 4 };
    const seen: number[] = [];
    const part = await ask('part', questions, { places, onProgress: ({ total }) => void seen.push(total) });
    expect(part).toMatchObject({ cells: 4, computed: 4 });
    expect(new Set(seen)).toEqual(new Set([4]));
    expect(await ask('part', questions)).toMatchObject({ cells: 16, computed: 12, stored: 4 });
  });

  it('answers what is measured of an unfinished sweep and counts the rest', async () => {
    const { grid, document } = doubleWell('begun', { couplings: 2, schedules: 1 });
    const queue = openInProcessQueue();
    const abort = new AbortController();
    const pool = inlinePool(({ spec }) => {
      if (spec.size === 6) abort.abort();
    });
    await runSweep({ grid, document, store, queue, pool, memory: MEMORY, signal: abort.signal, jobPoints: 1, window: 1 });
    await queue.close();
    const { storedPoints } = await store.progress('begun');
    expect(storedPoints).toBeGreaterThan(0);
    const enrolled = (await rowsOf(store, 'begun')).length;
    const summary = await ask('begun', doubleWell('x', { couplings: 2, schedules: 2 }).grid.questions.slice(1));
    expect(summary).toMatchObject({ computed: storedPoints, unmeasured: enrolled - storedPoints });
  });

  it('says what cannot be answered and leaves the sweep without failures', async () => {
    await sweep(doubleWell('narrow', { couplings: 2, schedules: 1 }));
    const questions = doubleWell('x', { couplings: 2, schedules: 2 }).grid.questions.slice(1);
    const summary = await ask('narrow', questions, { memory: 16 });
    expect(summary).toMatchObject({ computed: 0, measures: 0 });
    expect(summary.failures.reduce((sum, { count }) => sum + count, 0)).toBe(8);
    expect(summary.failures[0].code).toBe('point.too-large');
    expect(await store.progress('narrow')).toMatchObject({ failedPoints: 0 });
  });

  it('counts a point that lies at two places of the grid once', async () => {
    const file = {
      name: 'clean twice',
      model: 'tight-binding',
      size: 4,
      coupling: [1, 2],
      prepare: { site: 1 },
      disorder: { strength: 0, realisations: 3, seed: 1 },
      schedules: [{ family: 'exponential', mean: 0.5 }],
      budget: 20,
    };
    await sweep(sweepOf({ ...file, name: 'clean-twice' }));
    const { grid } = sweepOf({ ...file, name: 'x', budget: 30 });
    const summary = await ask('clean-twice', grid.questions);
    expect(summary.computed).toBe(new Set((await rowsOf(store, 'clean-twice')).map(({ pointId }) => pointId)).size);
    expect((await rowsOf(store, 'clean-twice')).every(({ fields }) => fields !== null)).toBe(true);
  });

  it('stops between bundles when interrupted, and refuses measures of another method', async () => {
    await sweep(doubleWell('old', { couplings: 2, schedules: 1 }));
    const questions = doubleWell('x', { couplings: 2, schedules: 2 }).grid.questions.slice(1);
    expect(await ask('old', questions, { signal: AbortSignal.abort() })).toMatchObject({ outcome: 'interrupted', computed: 0 });
    await database.query(`update windrow.sweep set method_version = 'w0-other'`);
    await expect(ask('old', questions)).rejects.toMatchObject({ code: 'sweep.differs' });
    await expect(ask('nobody', questions)).rejects.toMatchObject({ code: 'sweep.unknown' });
  });
});
