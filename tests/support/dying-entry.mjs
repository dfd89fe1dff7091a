/**
 * The built compute entry with one deadly point in it: a coupling of 1.5 fills the heap of its thread until the thread is ended.
 * Everything else is computed as always.
 */
import { evaluateTasks as evaluate } from '../../dist/workers/compute.js';

export function evaluateTasks(request) {
  if (request.tasks.some(({ spec }) => spec.coupling === 1.5)) {
    const hoard = [];
    for (;;) hoard.push({ hoard: new Array(1000).fill(hoard.length) });
  }
  return evaluate(request);
}
