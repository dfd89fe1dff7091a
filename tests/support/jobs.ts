/** Jobs for tests of queues: real specs of a two-level system, never evaluated there. */
import { digest } from '../../src/core/json.js';
import type { Job } from '../../src/queue/types.js';
import type { PointSpec, QuestionRecord } from '../../src/sweep/types.js';

export const twoLevelSpec = (coupling: number): PointSpec => ({
  model: 'two-level',
  size: 2,
  coupling,
  parameters: { bias: 0 },
  disorder: null,
  prepared: 'up',
  detected: 'same',
});

const QUESTION: QuestionRecord = {
  id: digest('question'),
  ordinal: 0,
  question: {
    schedule: { family: 'exponential', mean: 0.5 },
    resolution: { energy: 'auto', weight: 'auto' },
    budget: 100,
    detector: { efficiency: 1 },
    sampling: null,
  },
};

/** A job of `points` points, told from others by its number. */
export function sampleJob(number: number, points = 1, sweep = 'sample'): Job {
  const specs = Array.from({ length: points }, (_, index) => twoLevelSpec(number + index / 1000));
  return {
    id: digest(['job', sweep, number, points]),
    sweep,
    methodVersion: 'sample-1',
    questions: [QUESTION],
    points: specs.map((spec) => ({ id: digest(['point', spec.coupling]), spec, measured: false, open: [0] })),
    memory: 1e6,
    cost: 1e6,
  };
}
