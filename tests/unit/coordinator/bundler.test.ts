import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { digest } from '../../../src/core/json.js';
import { createBundler, JOB_OPERATIONS, JOB_POINTS } from '../../../src/coordinator/bundler.js';
import type { Job } from '../../../src/queue/types.js';
import type { MissingPoint } from '../../../src/store/types.js';
import type { QuestionRecord } from '../../../src/sweep/types.js';
import { sampleJob, twoLevelSpec } from '../../support/jobs.js';

const questions: readonly QuestionRecord[] = ['a', 'b', 'c'].map((label, ordinal) => ({
  ...sampleJob(0).questions[0],
  id: digest(label),
  ordinal,
}));
const missing = (index: number, asked: readonly number[] = [0, 1, 2], measured = false): MissingPoint => ({
  id: digest(['point', index]),
  measured,
  questionIds: asked.map((question) => questions[question].id),
  failure: null,
});
const bundler = () => createBundler({ sweep: 'sample', methodVersion: 'sample-1', questions });

/** Bundles points of the given costs, in order. */
function bundle(costs: readonly number[]): Job[] {
  const target = bundler();
  const jobs = costs.flatMap((operations, index) => target.push(missing(index), twoLevelSpec(index), { memory: operations, operations }));
  return [...jobs, ...target.flush()];
}

describe('bundler', () => {
  it('puts many cheap points into one job', () => {
    const jobs = bundle(new Array<number>(1000).fill(1));
    expect(jobs.map(({ points }) => points.length)).toEqual([JOB_POINTS, JOB_POINTS, JOB_POINTS, JOB_POINTS]);
    expect(JOB_POINTS).toBeGreaterThanOrEqual(100);
  });

  it('gives a costly point a job of its own', () => {
    const jobs = bundle([1, 1, 10 * JOB_OPERATIONS, 1]);
    expect(jobs.map(({ points }) => points.length)).toEqual([2, 1, 1]);
    expect(jobs.map(({ cost }) => cost)).toEqual([2, 10 * JOB_OPERATIONS, 1]);
    expect(jobs[1].memory).toBe(10 * JOB_OPERATIONS);
  });

  it('points to the open questions only, and says which measures are stored', () => {
    const target = bundler();
    target.push(missing(0, [2], true), twoLevelSpec(0), { memory: 1, operations: 1 });
    target.push(missing(1, [0, 1]), twoLevelSpec(1), { memory: 3, operations: 1 });
    const [job] = target.flush();
    expect(job.points.map(({ measured, open }) => ({ measured, open }))).toEqual([
      { measured: true, open: [2] },
      { measured: false, open: [0, 1] },
    ]);
    expect(job.questions).toEqual(questions);
    expect(job.memory).toBe(3);
    expect(target.flush()).toEqual([]);
  });

  it('identifies a job by its content', () => {
    const one = (index: number, asked: readonly number[], sweep = 'sample'): string => {
      const target = createBundler({ sweep, methodVersion: 'sample-1', questions });
      target.push(missing(index, asked), twoLevelSpec(index), { memory: 1, operations: 1 });
      return target.flush()[0].id;
    };
    expect(one(0, [0])).toBe(one(0, [0]));
    expect(new Set([one(0, [0]), one(1, [0]), one(0, [1]), one(0, [0], 'other')]).size).toBe(4);
  });

  it('loses, doubles and reorders nothing, and keeps its bounds, for any costs', () => {
    const cost = fc.oneof(fc.nat(1000), fc.integer({ min: 0, max: 2 * JOB_OPERATIONS }));
    fc.assert(
      fc.property(fc.array(cost, { maxLength: 600 }), (costs) => {
        const jobs = bundle(costs);
        expect(jobs.flatMap(({ points }) => points.map(({ spec }) => spec.coupling))).toEqual(costs.map((_, index) => index));
        for (const { points, cost: total } of jobs) {
          expect(points.length).toBeGreaterThan(0);
          expect(points.length).toBeLessThanOrEqual(JOB_POINTS);
          if (points.length > 1) expect(total).toBeLessThanOrEqual(JOB_OPERATIONS);
        }
        // Neighbours could not have been one job: bundles are as large as they may be.
        for (let index = 1; index < jobs.length; index++) {
          const merged = jobs[index - 1].cost + jobs[index].cost;
          expect(merged >= JOB_OPERATIONS || jobs[index - 1].points.length === JOB_POINTS).toBe(true);
        }
      }),
      { numRuns: 50 },
    );
  });
});
