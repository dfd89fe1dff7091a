/** A compute pool without threads: the same evaluation, on the caller's loop, giving way between two points. */
import type { ComputePool } from '../../src/queue/types.js';
import { evaluatePoint } from '../../src/sweep/evaluate.js';
import type { PointTask } from '../../src/sweep/types.js';

/** @param before called with each point before it is evaluated */
export function inlinePool(before: (task: PointTask) => void | Promise<void> = () => undefined): ComputePool {
  return {
    threads: 2,
    async run(tasks, options) {
      const outcomes = [];
      for (const task of tasks) {
        await before(task);
        await new Promise(setImmediate);
        outcomes.push(evaluatePoint(task, options, () => performance.now()));
      }
      return outcomes;
    },
    close: () => Promise.resolve(),
  };
}
