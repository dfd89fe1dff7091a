/**
 * Lanes: jobs wait apart by the memory their costliest point needs, so that a large matrix never lands on a small worker.
 *
 * The bound of a lane is also the memory an evaluation may use in it. It is the same on every worker, so whether a point is too large
 * depends on the cluster's settings and not on who happened to take it.
 */
import { WindrowError } from '../core/errors.js';

export interface Lane {
  readonly name: string;
  /** bytes one evaluation in this lane may use */
  readonly memory: number;
}

/** All lanes of a cluster, ascending by memory. */
export type Lanes = readonly [Lane, ...Lane[]];

const GIBIBYTE = 2 ** 30;

export const LANES: Lanes = [
  { name: 'small', memory: GIBIBYTE / 2 },
  { name: 'large', memory: 16 * GIBIBYTE },
];

/** The smallest lane that holds the need; the largest where none does: there the point is refused with its reason. */
export function laneOf(memory: number, lanes: Lanes): Lane {
  return lanes.find((lane) => memory <= lane.memory) ?? lanes[lanes.length - 1];
}

/**
 * The lanes of a worker whose threads may use `memory` bytes each: those named, or all it can serve.
 * @throws settings.invalid for an unknown name, a lane that needs more than the worker has, or no lane at all
 */
export function lanesFor(memory: number, lanes: Lanes, names?: readonly string[]): readonly Lane[] {
  const able = lanes.filter((lane) => lane.memory <= memory);
  const chosen = names === undefined ? able : names.map((name) => lanes.find((lane) => lane.name === name) ?? unknown(name, lanes));
  const beyond = chosen.find((lane) => lane.memory > memory);
  if (beyond !== undefined || chosen.length === 0) {
    const least = beyond ?? lanes[0];
    throw new WindrowError('settings.invalid', `lane '${least.name}' needs more memory for each thread than this worker may use`, {
      where: 'memory',
      found: `${memory} bytes a thread`,
      allowed: `at least ${least.memory} bytes: fewer threads, more memory, or another lane`,
    });
  }
  return [...new Set(chosen)];
}

function unknown(name: string, lanes: Lanes): never {
  throw new WindrowError('settings.invalid', 'there is no such lane', {
    where: 'lanes',
    found: name,
    allowed: lanes.map((lane) => lane.name).join(', '),
  });
}
