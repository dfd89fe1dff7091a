import { existsSync, mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, afterEach, describe, expect, it } from 'vitest';
import { digest } from '../../../src/core/json.js';
import { openComputePool } from '../../../src/queue/compute-pool.js';
import type { ComputePool } from '../../../src/queue/types.js';
import type { PointTask } from '../../../src/sweep/types.js';
import { twoLevelSpec } from '../../support/jobs.js';

const entry = new URL('../../support/pool-entry.mjs', import.meta.url).pathname;
const folder = mkdtempSync(join(tmpdir(), 'windrow-pool-'));
const EXHAUST = 1;
const EXIT = 2;
const THROW = 3;
const DIE_ONCE = 4;
const MEASURE = 5;

const task = (coupling: number, index: number): PointTask => ({
  id: digest(['task', coupling, index]),
  spec: { ...twoLevelSpec(coupling), parameters: { flag: join(folder, 'died') } },
  stored: null,
  questions: [],
});
const bundle = (couplings: readonly number[]): PointTask[] => couplings.map(task);
const OPTIONS = { memory: 1e9 };

describe('compute pool', () => {
  let pool: ComputePool;
  const open = (threads = 2): ComputePool => (pool = openComputePool({ entry, threads, heap: 64 * 2 ** 20 }));
  afterEach(() => pool.close());
  afterAll(() => rmSync(folder, { recursive: true }));

  it('answers every task in order', async () => {
    const outcomes = await open().run(bundle([10, 11, 12]), OPTIONS);
    expect(outcomes.map(({ seconds }) => seconds.kernel)).toEqual([10, 11, 12]);
  });

  it('answers an empty bundle', async () => {
    expect(await open().run([], OPTIONS)).toEqual([]);
  });

  it('hands measures over as they are, shared arrays still shared', async () => {
    const [{ point }] = await open().run(bundle([MEASURE]), OPTIONS);
    const measure = point!.measured.measure;
    expect(measure.energies).toEqual(new Float64Array([-1, 1]));
    expect(measure.weights).toEqual(new Float64Array([0.25, 0.75]));
    expect(measure.overlapRe).toBe(measure.weights);
  });

  it('sets a point aside that exhausts the memory of its thread, and computes the others', async () => {
    const tasks = bundle([10, 11, EXHAUST, 13, 14]);
    const outcomes = await open().run(tasks, OPTIONS);
    expect(outcomes.map(({ failure }) => failure?.code ?? null)).toEqual([null, null, 'point.too-large', null, null]);
    expect(outcomes[2].failure).toMatchObject({ id: tasks[2].id, spec: tasks[2].spec });
    expect(outcomes[2].failure?.message).toContain('ran out of memory');
    expect(outcomes.map(({ seconds }) => seconds.kernel)).toEqual([10, 11, 0, 13, 14]);
  });

  it('leaves the bundles of other threads alone', async () => {
    open();
    const [guilty, innocent] = await Promise.all([pool.run(bundle([EXHAUST]), OPTIONS), pool.run(bundle([10, 11]), OPTIONS)]);
    expect(guilty[0].failure?.code).toBe('point.too-large');
    expect(innocent.every(({ failure }) => failure === null)).toBe(true);
  });

  it('deals with a thread that exits in the same way, and with two guilty points', async () => {
    const outcomes = await open(1).run(bundle([EXIT, 11, EXHAUST]), OPTIONS);
    expect(outcomes.map(({ failure }) => failure?.code ?? null)).toEqual(['point.too-large', null, 'point.too-large']);
  });

  it('gives a point a second chance when its thread died once', async () => {
    const outcomes = await open().run(bundle([DIE_ONCE]), OPTIONS);
    expect(existsSync(join(folder, 'died'))).toBe(true);
    expect(outcomes[0].failure).toBeNull();
  });

  it('passes a fault of the program on', async () => {
    await expect(open().run(bundle([10, THROW]), OPTIONS)).rejects.toThrow('a fault of the program');
    expect((await pool.run(bundle([12]), OPTIONS))[0].seconds.kernel).toBe(12);
  });

  it('refuses an entry that does not exist, and work after it is closed', async () => {
    open();
    await pool.close();
    await expect(pool.run(bundle([10]), OPTIONS)).rejects.toMatchObject({ code: 'internal.invariant' });
    expect(() => openComputePool({ entry: `${entry}.missing`, threads: 1 })).toThrow('build the program first');
  });
});
