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

const GIBIBYTE = 2 ** 30;

/** Ascending by memory. */
export const LANES: readonly [Lane, ...Lane[]] = [
  { name: 'small', memory: GIBIBYTE },
  { name: 'large', memory: 16 * GIBIBYTE },
];

/** The smallest lane that holds the need; the largest where none does: there the point is refused with its reason. */
export function laneOf(memory: number): Lane {
  return LANES.find((lane) => memory <= lane.memory) ?? LANES[LANES.length - 1];
}

/**
 * The lanes of a worker whose threads may use `memory` bytes each: those named, or all it can serve.
 * @throws settings.invalid for an unknown name, a lane that needs more than the worker has, or no lane at all
 */
export function lanesFor(memory: number, names?: readonly string[]): readonly Lane[] {
  const able = LANES.filter((lane) => lane.memory <= memory);
  const chosen = names === undefined ? able : names.map((name) => LANES.find((lane) => lane.name === name) ?? unknown(name));
  const beyond = chosen.find((lane) => lane.memory > memory);
  if (beyond !== undefined || chosen.length === 0) {
    const least = beyond ?? LANES[0];
    throw new WindrowError('settings.invalid', `lane '${least.name}' needs more memory for each thread than this worker may use`, {
      where: 'memory',
      found: `${String(memory)} bytes a thread`,
      allowed: `at least ${String(least.memory)} bytes: fewer threads, more memory, or another lane`,
    });
  }
  return [...new Set(chosen)];
}

function unknown(name: string): never {
  throw new WindrowError('settings.invalid', 'there is no such lane', {
    where: 'lanes',
    found: name,
    allowed: LANES.map((lane) => lane.name).join(', '),
  });
}
