/** Evaluation and estimates, against closed forms of the two-level system and the ring. */
import { describe, expect, it } from 'vitest';
import { estimateSweep } from '../../../src/sweep/estimate.js';
import { evaluatePoint } from '../../../src/sweep/evaluate.js';
import { expandGrid } from '../../../src/sweep/grid.js';
import { cellId } from '../../../src/sweep/identity.js';
import { documentFromJson } from '../../../src/sweep/read.js';
import type { Grid, PointTask } from '../../../src/sweep/types.js';
import { smallSweep, type Mapping } from '../../support/small-sweep.js';

const gridOf = (changes: Mapping): Grid => expandGrid(documentFromJson(smallSweep(changes)));
const options = { memory: 1e9 };

function taskOf(grid: Grid, ordinal = 0): PointTask {
  const { id, spec } = grid.pointAt(ordinal);
  return { id, spec, stored: null, questions: grid.questions };
}

const twoLevel: Mapping = {
  model: 'two-level',
  size: 2,
  coupling: 1,
  prepare: 'up',
  schedules: [
    { family: 'fixed', interval: 1 },
    { family: 'exponential', mean: 1 },
  ],
  budget: 1000,
};

describe('evaluatePoint', () => {
  it('answers the two-level return problem', () => {
    // Mean 2; variance 2 cot²(gτ) for a fixed interval: Large fluctuations of the first detected quantum return time, Phys. Rev.
    // Research 1, 033086 (2019), 10.1103/PhysRevResearch.1.033086. Exponential intervals: variance 2 + 1/(g·mean)² (closed form).
    const grid = gridOf(twoLevel);
    const outcome = evaluatePoint(taskOf(grid), options);
    expect(outcome.failure).toBeNull();
    const [fixed, exponential] = outcome.cells.map(({ fields }) => fields);
    // 1e-10: a handful of operations on O(1) numbers.
    expect(fixed?.mean_measurements).toBeCloseTo(2, 10);
    expect(fixed?.variance_measurements).toBeCloseTo(2 / Math.tan(1) ** 2, 10);
    expect(exponential?.mean_measurements).toBeCloseTo(2, 10);
    expect(exponential?.variance_measurements).toBeCloseTo(3, 10);
    expect(outcome.point?.measured.fields.accessible_dimension).toBe(2);
    expect(outcome.cells.map(({ id }) => id)).toEqual(grid.questions.map(({ id }) => cellId(grid.pointAt(0).id, id)));
  });

  it('counts the levels of a ring that a site reaches: L/2 + 1', () => {
    // Quantum walks: the first detected passage time problem, Phys. Rev. E 95, 032141 (2017), 10.1103/PhysRevE.95.032141.
    const grid = gridOf({ ...twoLevel, model: 'tight-binding', size: [4, 6, 8], prepare: { site: 1 } });
    const levels = [...grid.iterate()].map(({ ordinal }) => evaluatePoint(taskOf(grid, ordinal), options).cells[1]?.fields.winding_number);
    expect(levels).toEqual([3, 4, 5]);
  });

  it('answers from a stored measure without building anything', () => {
    const task = taskOf(gridOf(twoLevel));
    const first = evaluatePoint(task, options);
    const stored = first.point?.measured ?? null;
    // A model nobody knows cannot be built; the stored measure is enough.
    const second = evaluatePoint({ ...task, spec: { ...task.spec, model: 'unknown' }, stored }, options);
    expect(second.point).toBeNull();
    expect(second.cells).toEqual(first.cells);
  });

  it('tells why a point is too large, before it is built', () => {
    const task = taskOf(gridOf({ model: 'bose-hubbard-chain', size: 20, coupling: 1, prepare: 'unit-filling' }));
    const { point, cells, failure } = evaluatePoint(task, options);
    expect([point, cells]).toEqual([null, []]);
    expect(failure?.code).toBe('point.too-large');
    // C(39, 20) configurations (closed form).
    expect(failure?.message).toMatch(/dimension 68923264410 needs .* more than the limit of 1000 MB.*allowed 1000000000 bytes/);
  });

  it('turns every error into a failure of this point', () => {
    const task = taskOf(gridOf(twoLevel));
    const codes = [
      evaluatePoint({ ...task, spec: { ...task.spec, model: 'unknown' } }, options),
      evaluatePoint({ ...task, spec: { ...task.spec, prepared: 'sideways' } }, options),
      evaluatePoint({ ...task, spec: { ...task.spec, parameters: null as never } }, options),
    ].map(({ failure }) => failure?.code);
    expect(codes).toEqual(['model.unknown', 'state.unknown', 'internal.invariant']);
  });

  it('keeps the answers beside a question that cannot be answered', () => {
    const task = taskOf(gridOf(twoLevel));
    const [good, other] = task.questions;
    const bad = { ...other, question: { ...other.question, schedule: { family: 'none' } } };
    const { point, cells, failure } = evaluatePoint({ ...task, questions: [bad, good] }, options);
    expect(point).not.toBeNull();
    expect(cells.map(({ questionId }) => questionId)).toEqual([good.id]);
    expect(failure).toMatchObject({ id: task.id, code: 'schedule.unknown' });
    expect(failure?.message).toMatch(/^question 1 \(none\): /);
  });

  it('measures time by the clock it is handed', () => {
    let now = 0;
    const { seconds } = evaluatePoint(taskOf(gridOf(twoLevel)), options, () => (now += 500));
    expect(seconds).toEqual({ kernel: 0.5, statistics: 0.5 });
  });
});

describe('estimateSweep', () => {
  it('finds the largest point of a large grid', () => {
    const grid = gridOf({ size: { from: 1, to: 999, step: 1 }, coupling: { from: 0, to: 1, count: 1000 }, budget: 10 });
    const estimate = estimateSweep(grid);
    expect(estimate.points).toBe(999_000);
    expect(estimate.sampled).toBeLessThan(10_000);
    expect(estimate.largestDimension).toBe(1000);
  });

  it('adds up what a sampled grid costs as if every point were looked at', () => {
    // The same axis once short enough to be looked at whole, once with ten times the couplings: cost per point is the same.
    const size = { from: 1, to: 100, step: 1 };
    const whole = estimateSweep(gridOf({ size, coupling: { from: 0, to: 1, count: 10 }, budget: 10 }));
    const sampled = estimateSweep(gridOf({ size, coupling: { from: 0, to: 1, count: 1000 }, budget: 10 }));
    expect(whole.sampled).toBe(whole.points);
    expect(sampled.sampled).toBeLessThan(sampled.points);
    // 2000 low-discrepancy samples of a smooth function: 1 % is a wide margin.
    expect(sampled.flops.total / sampled.points / (whole.flops.total / whole.points)).toBeCloseTo(1, 2);
  });

  it('divides the work among threads', () => {
    const grid = gridOf({});
    expect(estimateSweep(grid, { threads: 4, rate: 1e6 }).seconds).toBeCloseTo(estimateSweep(grid, { threads: 1, rate: 4e6 }).seconds, 12);
  });
});
