/** Recheck on a real store: what is right passes bit by bit, and whatever is changed in a row is found. */
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { followUp } from '../../src/coordinator/follow-up.js';
import { drawOrdinals, recheck, type Recheck } from '../../src/coordinator/recheck.js';
import { runSweep } from '../../src/coordinator/run-sweep.js';
import { openInProcessQueue } from '../../src/queue/in-process/in-process-queue.js';
import type { ResultStore } from '../../src/store/types.js';
import { createDatabase, type TestDatabase } from '../support/database.js';
import { inlinePool } from '../support/inline-pool.js';
import { doubleWell } from '../support/sweeps.js';

const MEMORY = 2 ** 30;
const { grid, document } = doubleWell('checked', { couplings: 5 });

describe('recheck', () => {
  let database: TestDatabase;
  let store: ResultStore;

  beforeAll(async () => {
    database = await createDatabase();
    store = await database.open();
    const queue = openInProcessQueue();
    await runSweep({ grid, document, store, queue, pool: inlinePool(), memory: MEMORY });
    await queue.close();
    const questions = doubleWell('more', { couplings: 5, schedules: 3 }).grid.questions.slice(2);
    await followUp({ sweep: 'checked', questions, store, pool: inlinePool(), memory: MEMORY });
  });
  afterAll(() => database.drop());

  const check = async (changes: Partial<Recheck> = {}) => {
    const record = (await store.findSweep('checked'))!;
    return recheck({ record, grid, store, pool: inlinePool(), memory: MEMORY, sample: 200, seed: 0, tolerance: 1e-9, ...changes });
  };
  /** Runs `change`, rechecks, and takes the change back. */
  const tampered = async (change: string, back: string) => {
    await database.query(change);
    const summary = await check();
    await database.query(back);
    return summary;
  };

  it('finds every value of an untouched sweep the same, bit by bit, follow-ups included', async () => {
    const progress: number[] = [];
    const { values, ...counts } = await check({ onProgress: (done) => void progress.push(done) });
    expect(counts).toEqual({ drawn: 20, checked: 20, unmeasured: 0, uncomputable: [], cells: 60, sameMethod: true });
    expect(values).toMatchObject({ within: 0, beyond: 0, differences: [] });
    // At least the fields: 12 + 2 of each point, 21 + 2 of each cell.
    expect(values.identical).toBeGreaterThan(20 * 14 + 60 * 23);
    expect(progress).toEqual([20]);
  });

  it('finds what was changed in a cell, a measure, a field, a point, or a place', async () => {
    const key: Record<string, string> = { cell: 'point_id, question_id', measure: 'point_id', point: 'id' };
    const first = (table: string) => `where (${key[table]}) = (select ${key[table]} from windrow.${table} order by ${key[table]} limit 1)`;
    const cases: [string, string, RegExp][] = [
      [
        'update windrow.cell set winding_number = winding_number + 1',
        'update windrow.cell set winding_number = winding_number - 1',
        /winding_number/,
      ],
      ['update windrow.measure set weights[1] = weights[1] * 4', 'update windrow.measure set weights[1] = weights[1] / 4', /weights\[0\]/],
      [
        'update windrow.measure set energies[2] = energies[2] * 2',
        'update windrow.measure set energies[2] = energies[2] / 2',
        /energies\[1\]|weights/,
      ],
      [`update windrow.measure set method = method || '!'`, `update windrow.measure set method = rtrim(method, '!')`, /method/],
      [
        `update windrow.point set spec = jsonb_set(spec, '{parameters,tilt}', '1')`,
        `update windrow.point set spec = jsonb_set(spec, '{parameters,tilt}', '0')`,
        /point_content/,
      ],
    ];
    for (const [change, back, field] of cases) {
      const table = /windrow\.(\w+)/.exec(change)![1];
      const { values } = await tampered(`${change} ${first(table)}`, `${back} ${first(table)}`);
      expect(values.beyond, change).toBeGreaterThan(0);
      expect(values.differences[0].field).toMatch(field);
      expect(values.differences[0].verdict).toBe('beyond');
    }
    const swap =
      'update windrow.sweep_point sp set point_id = o.point_id from windrow.sweep_point o where o.ordinal = 3 - sp.ordinal and sp.ordinal in (1, 2)';
    const { values } = await tampered(swap, swap);
    expect(values.fields.find(({ field }) => field === 'point_id')).toMatchObject({ beyond: 2 });
    expect((await check()).values.beyond).toBe(0);
  });

  it('lets a change of the last digits pass as agreement, and says that it is not the same', async () => {
    const { values } = await tampered(
      `update windrow.cell set capped_mean = capped_mean + 2e-15 where capped_mean between 2 and 4`,
      `update windrow.cell set capped_mean = capped_mean - 2e-15 where capped_mean between 2 and 4`,
    );
    expect(values.beyond).toBe(0);
    expect(values.within).toBeGreaterThan(0);
    expect(values.differences[0].field).toBe('capped_mean');
  });

  it('draws different points for different seeds, the same for the same', async () => {
    expect(await check({ sample: 3 })).toMatchObject({ drawn: 3, checked: 3, cells: 9 });
    for (const [points, sample] of [
      [1000, 10],
      [1000, 900],
      [5, 5],
      [3, 200],
    ] as const) {
      const drawn = drawOrdinals(points, sample, 7);
      expect(drawn).toHaveLength(Math.min(points, sample));
      expect(new Set(drawn).size).toBe(drawn.length);
      expect([...drawn].sort((a, b) => a - b)).toEqual(drawn);
      expect(drawn.every((ordinal) => ordinal >= 0 && ordinal < points)).toBe(true);
      expect(drawOrdinals(points, sample, 7)).toEqual(drawn);
    }
    expect(drawOrdinals(1000, 10, 7)).not.toEqual(drawOrdinals(1000, 10, 8));
  });

  it('counts what has no measure and what cannot be computed here', async () => {
    const { checked, uncomputable } = await check({ memory: 64 });
    expect(checked).toBe(0);
    expect(uncomputable.reduce((sum, { count }) => sum + count, 0)).toBe(20);
    expect(uncomputable[0].code).toBe('point.too-large');
    const begun = doubleWell('begun', { couplings: 30, from: 9 });
    await store.registerSweep({ ...(await store.findSweep('checked'))!, name: 'begun', points: 120, document: begun.document });
    const record = (await store.findSweep('begun'))!;
    expect(
      await recheck({ record, grid: begun.grid, store, pool: inlinePool(), memory: MEMORY, sample: 9, seed: 0, tolerance: 0 }),
    ).toMatchObject({
      drawn: 9,
      checked: 0,
      unmeasured: 9,
    });
  });
});
