/** The coordinator on a real store and the in-process queue: what a run computes, reuses, skips, repeats and reports. */
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { WindrowError } from '../../src/core/errors.js';
import { resumeSweep } from '../../src/coordinator/resume-sweep.js';
import { runSweep } from '../../src/coordinator/run-sweep.js';
import type { SweepRun, SweepStatus } from '../../src/coordinator/types.js';
import { openInProcessQueue } from '../../src/queue/in-process/in-process-queue.js';
import type { JobQueue } from '../../src/queue/types.js';
import type { ResultStore } from '../../src/store/types.js';
import { evaluatePoint } from '../../src/sweep/evaluate.js';
import { createDatabase, type TestDatabase } from '../support/database.js';
import { inlinePool } from '../support/inline-pool.js';
import { overriding } from '../support/overriding.js';
import { waitFor } from '../support/wait-for.js';
import { doubleWell, rowsOf, sweepOf, type SampleSweep } from '../support/sweeps.js';

const MEMORY = 2 ** 30;
const backoff = { firstMs: 1, ceilingMs: 5 };

describe('running a sweep', () => {
  let database: TestDatabase;
  let store: ResultStore;
  const queues: JobQueue[] = [];

  const openQueue = (): JobQueue => {
    const queue = openInProcessQueue({ backoff });
    queues.push(queue);
    return queue;
  };
  const runOf = (sweep: SampleSweep, changes: Partial<SweepRun> = {}): SweepRun => ({
    ...sweep,
    store,
    queue: openQueue(),
    pool: inlinePool(),
    memory: MEMORY,
    jobPoints: 7,
    progressMs: 20,
    ...changes,
  });

  beforeEach(async () => {
    database = await createDatabase();
    store = await database.open();
  });
  afterEach(async () => {
    await Promise.all(queues.splice(0).map((queue) => queue.close()));
    await database.drop();
  });

  it('answers every cell as the evaluation of its point does', async () => {
    const sweep = doubleWell('whole');
    const summary = await runSweep(runOf(sweep));
    expect(summary).toMatchObject({ outcome: 'done', points: 80, cells: 160, computed: 160, reused: 0, failed: 0, failures: [] });
    const rows = await rowsOf(store, 'whole');
    expect(rows.map(({ ordinal }) => ordinal)).toEqual([...Array(160).keys()].map((row) => Math.floor(row / 2)));
    for (const row of rows) {
      const { id, spec } = sweep.grid.pointAt(row.ordinal);
      const alone = evaluatePoint({ id, spec, stored: null, questions: sweep.grid.questions }, { memory: MEMORY });
      expect(row.fields).toEqual(alone.cells[row.questionOrdinal].fields);
      expect(row.point).toEqual(alone.point!.measured.fields);
    }
    expect((await store.findSweep('whole'))?.state).toBe('done');
  });

  it('computes nothing a second time', async () => {
    await runSweep(runOf(doubleWell('again')));
    const evaluated: string[] = [];
    const summary = await runSweep(runOf(doubleWell('again'), { pool: inlinePool(({ id }) => void evaluated.push(id)) }));
    expect(summary).toMatchObject({ outcome: 'done', computed: 0, reused: 160 });
    expect(evaluated).toEqual([]);
  });

  it('shares points between sweeps and answers new questions from stored measures', async () => {
    await runSweep(runOf(doubleWell('first', { schedules: 1 })));
    const stored: boolean[] = [];
    const pool = inlinePool((task) => void stored.push(task.stored !== null));
    const summary = await runSweep(runOf(doubleWell('second', { schedules: 3 }), { pool }));
    expect(summary).toMatchObject({ cells: 240, computed: 160, reused: 80 });
    expect(stored).toEqual(new Array(80).fill(true));
    const rows = await rowsOf(store, 'second');
    expect(rows.every(({ fields }) => fields !== null)).toBe(true);
  });

  it('answers from a stored measure exactly as from a fresh one', async () => {
    await runSweep(runOf(doubleWell('fresh', { schedules: 3 })));
    const fresh = await rowsOf(store, 'fresh');
    const other = await createDatabase();
    try {
      const reused = await other.open();
      await runSweep(runOf(doubleWell('early', { schedules: 1 }), { store: reused }));
      await runSweep(runOf(doubleWell('fresh', { schedules: 3 }), { store: reused }));
      expect(await rowsOf(reused, 'fresh')).toEqual(fresh);
    } finally {
      await other.drop();
    }
  });

  it('drains when it is interrupted, and computes only the rest when resumed', async () => {
    const controller = new AbortController();
    const evaluated: string[] = [];
    const count = ({ id }: { id: string }): void => {
      evaluated.push(id);
      if (evaluated.length === 30) controller.abort();
    };
    const first = await runSweep(runOf(doubleWell('cut'), { pool: inlinePool(count), signal: controller.signal }));
    expect(first.outcome).toBe('interrupted');
    expect(first.computed).toBe(2 * evaluated.length);
    expect(first.computed).toBeLessThan(160);
    expect((await store.findSweep('cut'))?.state).toBe('open');
    const { grid: _grid, document: _document, ...rest } = runOf(doubleWell('cut'), { pool: inlinePool(count) });
    const second = await resumeSweep('cut', rest);
    expect(second).toMatchObject({ outcome: 'done', computed: 160 - first.computed, reused: first.computed });
    expect(new Set(evaluated).size).toBe(evaluated.length);
    expect(evaluated.length).toBe(80);
  });

  it('does nothing when it is interrupted before it starts', async () => {
    const summary = await runSweep(runOf(doubleWell('never'), { signal: AbortSignal.abort() }));
    expect(summary).toMatchObject({ outcome: 'interrupted', computed: 0 });
  });

  it('stops when the store says so', async () => {
    let evaluated = 0;
    const pool = inlinePool(async () => {
      if (++evaluated === 10) await store.setSweepState('halted', 'stopping');
      if (evaluated > 10) await new Promise((resolve) => setTimeout(resolve, 10));
    });
    const summary = await runSweep(runOf(doubleWell('halted', { couplings: 100 }), { pool, window: 4 }));
    expect(summary.outcome).toBe('stopped');
    expect(summary.computed).toBeLessThan(800);
    expect(summary.computed).toBe(2 * evaluated);
    expect((await store.findSweep('halted'))?.state).toBe('stopping');
    expect((await runSweep(runOf(doubleWell('halted', { couplings: 100 })))).outcome).toBe('done');
  });

  it('stores a failing point with its reason, computes the others, and tries again only when asked', async () => {
    const tight = { memory: 1500 };
    const summary = await runSweep(runOf(doubleWell('tight'), tight));
    expect(summary.failed).toBeGreaterThan(0);
    expect(summary.failed).toBeLessThan(80);
    expect(summary.failures.every(({ code }) => code === 'point.too-large')).toBe(true);
    // A point may fail at one question and keep its answers to others.
    const open = (await rowsOf(store, 'tight')).filter(({ fields }) => fields === null);
    expect(open.every(({ failure }) => failure?.code === 'point.too-large')).toBe(true);
    expect(new Set(open.map(({ pointId }) => pointId)).size).toBe(summary.failed);
    expect(summary).toMatchObject({ outcome: 'done', computed: 160 - open.length });
    expect(await runSweep(runOf(doubleWell('tight')))).toMatchObject({ failed: summary.failed, computed: 0 });
    const retried = await runSweep(runOf(doubleWell('tight'), { retryFailed: true }));
    expect(retried).toMatchObject({ outcome: 'done', failed: 0, computed: open.length, reused: 160 - open.length });
  });

  it('reports progress that only grows and ends complete', async () => {
    const seen: SweepStatus[] = [];
    let evaluated = 0;
    // Half way, the work waits until it has been seen.
    const pool = inlinePool(async () => {
      if (++evaluated === 40) await waitFor(() => seen.some(({ storedCells }) => storedCells > 0), 'a report with results');
    });
    await runSweep(runOf(doubleWell('seen'), { pool, onProgress: (status) => seen.push(status) }));
    const cells = seen.map(({ storedCells }) => storedCells);
    expect(cells).toEqual([...cells].sort((a, b) => a - b));
    expect(cells.some((count) => count > 0 && count < 160)).toBe(true);
    expect(cells.at(-1)).toBe(160);
    expect(seen.every(({ sweep, points, cells: all }) => sweep === 'seen' && points === 80 && all === 160)).toBe(true);
  });

  it('computes a point once that stands at several places of the grid', async () => {
    const evaluated: string[] = [];
    const sweep = sweepOf({
      name: 'twice',
      model: 'tight-binding',
      size: [4, 5],
      coupling: [1],
      prepare: { site: 1 },
      disorder: { strength: 0, realisations: 3, seed: 1 },
      schedules: [{ family: 'fixed', interval: 0.3 }],
      budget: 20,
    });
    const summary = await runSweep(runOf(sweep, { pool: inlinePool(({ id }) => void evaluated.push(id)) }));
    expect(summary).toMatchObject({ outcome: 'done', points: 6, cells: 6 });
    expect(evaluated.length).toBe(2);
    expect((await rowsOf(store, 'twice')).map(({ fields }) => fields?.winding_number)).toEqual([3, 3, 3, 3, 3, 3]);
  });

  describe('with several processes', () => {
    it('lets one hand out jobs and the other follow to the end', async () => {
      const other = await database.open();
      const phases = new Set<string>();
      const slow = () => inlinePool(() => new Promise((resolve) => setTimeout(resolve, 5)));
      const onProgress = ({ phase }: SweepStatus): void => void phases.add(phase);
      const evaluated: string[] = [];
      const record = inlinePool(async ({ id }) => {
        evaluated.push(id);
        await new Promise((resolve) => setTimeout(resolve, 5));
      });
      const [one, two] = await Promise.all([
        runSweep(runOf(doubleWell('pair'), { pool: record, onProgress })),
        runSweep(runOf(doubleWell('pair'), { pool: slow(), store: other, onProgress })),
      ]);
      expect([one.outcome, two.outcome]).toEqual(['done', 'done']);
      expect(phases).toContain('following');
      expect(await rowsOf(store, 'pair')).toHaveLength(160);
    });

    it('takes over from one that was interrupted', async () => {
      const other = await database.open();
      const controller = new AbortController();
      let evaluated = 0;
      const first = runSweep(
        runOf(doubleWell('relay'), {
          signal: controller.signal,
          pool: inlinePool(() => {
            if (++evaluated === 20) controller.abort();
          }),
        }),
      );
      const second = runSweep(runOf(doubleWell('relay'), { store: other }));
      expect((await second).outcome).toBe('done');
      expect((await store.progress('relay')).storedCells).toBe(160);
      await first;
    });

    it('lets two sweeps share points at the same time', async () => {
      const other = await database.open();
      const [left, right] = await Promise.all([
        runSweep(runOf(doubleWell('left', { from: 0.5 }))),
        runSweep(runOf(doubleWell('right', { from: 1 }), { store: other })),
      ]);
      for (const summary of [left, right]) expect(summary).toMatchObject({ outcome: 'done', failed: 0 });
      for (const name of ['left', 'right']) expect((await store.progress(name)).storedCells).toBe(160);
      const [a, b] = [await rowsOf(store, 'left'), await rowsOf(store, 'right')];
      const shared = new Map(a.map((row) => [row.cellId, row.fields]));
      const both = b.filter(({ cellId }) => shared.has(cellId));
      expect(both).toHaveLength(4 * 12 * 2);
      for (const row of both) expect(row.fields).toEqual(shared.get(row.cellId));
    });
  });

  describe('with faults', () => {
    const away = (): WindrowError => new WindrowError('store.unreachable', 'away for a moment');

    it('finds jobs that a queue has lost and hands them out again', async () => {
      let lost = 3;
      const queue = openQueue();
      const losing = overriding(queue, { add: (jobs) => (lost-- > 0 ? Promise.resolve() : queue.add(jobs)) });
      const summary = await runSweep(runOf(doubleWell('lost'), { queue: losing }));
      expect(summary).toMatchObject({ outcome: 'done', computed: 160, reused: 0 });
    });

    it('has patience with points that take long', async () => {
      const looks: number[] = [];
      const watched = overriding(store, { enrol: (sweep, points) => (looks.push(points.length), store.enrol(sweep, points)) });
      // The first point ends only when the store has been compared several times without anything new.
      const slow = inlinePool(() => waitFor(() => looks.length > 5, 'further walks'));
      const run = runOf(doubleWell('slow', { couplings: 1 }), { store: watched, pool: slow, patienceMs: 30 });
      expect(await runSweep(run)).toMatchObject({ outcome: 'done', computed: 8 });
    });

    it('gives up on a queue that loses everything', async () => {
      const losing = overriding(openQueue(), { add: () => Promise.resolve() });
      await expect(runSweep(runOf(doubleWell('void'), { queue: losing }))).rejects.toMatchObject({ code: 'queue.incomplete' });
    });

    it('waits for a queue that is full', async () => {
      const queue = openInProcessQueue({ capacity: 3, backoff });
      queues.push(queue);
      const summary = await runSweep(runOf(doubleWell('narrow'), { queue, window: 100 }));
      expect(summary).toMatchObject({ outcome: 'done', computed: 160 });
    });

    it('repeats what a store refuses for a moment', async () => {
      let calls = 0;
      const faulty = overriding(store, {
        save: (batch) => (++calls % 2 === 1 ? Promise.reject(away()) : store.save(batch)),
        enrol: (sweep, points) => (++calls % 3 === 1 ? Promise.reject(away()) : store.enrol(sweep, points)),
      });
      const summary = await runSweep(runOf(doubleWell('moody', { couplings: 5 }), { store: faulty }));
      expect(summary).toMatchObject({ outcome: 'done', computed: 40 });
      expect(calls).toBeGreaterThan(3);
    });

    it('ends at once with the reason when the disk is full', async () => {
      let saves = 0;
      const full = overriding(store, {
        save: (batch) => (++saves > 2 ? Promise.reject(new WindrowError('store.full', 'no space left')) : store.save(batch)),
      });
      await expect(runSweep(runOf(doubleWell('full'), { store: full }))).rejects.toMatchObject({ code: 'store.full' });
      expect(saves).toBeLessThan(12);
      const summary = await runSweep(runOf(doubleWell('full')));
      expect(summary.reused).toBeGreaterThan(0);
      expect(summary.computed + summary.reused).toBe(160);
    });

    it('stores the same rows when every job is delivered twice', async () => {
      await runSweep(runOf(doubleWell('once')));
      const once = await rowsOf(store, 'once');
      const other = await createDatabase();
      try {
        const queue = openQueue();
        const doubling = overriding(queue, {
          consume: (handler, options) =>
            queue.consume(async (job, delivery) => {
              await Promise.all([handler(job, delivery), handler(job, delivery)]);
            }, options),
        });
        const twice = await other.open();
        await runSweep(runOf(doubleWell('once'), { queue: doubling, store: twice }));
        expect(await rowsOf(twice, 'once')).toEqual(once);
      } finally {
        await other.drop();
      }
    });

    it('takes a job apart that has lost its worker, and sets a point aside that has lost two', async () => {
      const queue = openQueue();
      const sweep = doubleWell('deadly');
      const guilty = sweep.grid.pointAt(33).id;
      const losses = new Map<string, number>();
      // The first two workers that meet the guilty point are lost with their job; the queue delivers it again.
      const deadly = overriding(queue, {
        consume: (handler, options) =>
          queue.consume(async (job) => {
            const lost = losses.get(job.id) ?? 0;
            if (lost < 2 && job.points.some(({ id }) => id === guilty)) {
              losses.set(job.id, lost + 1);
              throw away();
            }
            await handler(job, { losses: lost });
          }, options),
      });
      const summary = await runSweep(runOf(sweep, { queue: deadly }));
      expect(summary).toMatchObject({ outcome: 'done', failed: 1, computed: 158 });
      expect(summary.failures[0]).toMatchObject({ code: 'point.too-large' });
      expect(summary.failures[0].message).toContain('2 workers were lost');
      const failed = (await rowsOf(store, 'deadly')).filter(({ fields }) => fields === null);
      expect(failed.map(({ pointId }) => pointId)).toEqual([guilty, guilty]);
    });

    it('refuses a name that is taken by another sweep, and a sweep that is not there', async () => {
      await runSweep(runOf(doubleWell('taken', { couplings: 2 })));
      await expect(runSweep(runOf(doubleWell('taken', { couplings: 3 })))).rejects.toMatchObject({ code: 'sweep.differs' });
      const { grid: _grid, document: _document, ...rest } = runOf(doubleWell('taken'));
      await expect(resumeSweep('absent', rest)).rejects.toMatchObject({ code: 'sweep.unknown' });
    });
  });
});
