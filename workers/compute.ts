/**
 * Compute entry of a worker thread: evaluates a bundle of points and hands the outcomes back without copying their measures.
 *
 * A point that fails is an outcome with its reason; nothing is thrown for it. What can end the thread (its heap limit) is dealt with by
 * the pool that owns it.
 */
import { move, transferableSymbol, valueSymbol } from 'piscina';
import type { ComputeRequest } from '../src/queue/compute-pool.js';
import { transferables } from '../src/queue/transferables.js';
import { evaluatePoint } from '../src/sweep/evaluate.js';

/** @returns the outcomes in the order of the tasks, wrapped for transfer */
export function evaluateTasks({ tasks, options }: ComputeRequest): unknown {
  const outcomes = tasks.map((task) => evaluatePoint(task, options, () => performance.now()));
  return move({ [transferableSymbol]: transferables(outcomes), [valueSymbol]: outcomes });
}
