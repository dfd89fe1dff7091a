/**
 * Evaluation: one point and its open questions in, rows out. Pure, so it runs the same in a thread, a process, a test or a browser.
 *
 * It never throws: a point that cannot be computed, for mathematical, resource or programming reasons, becomes a failure with its
 * code and reason, and the other points of a bundle go on. Answers found before a failure are kept.
 */
import { WindrowError, type ErrorCode } from '../core/errors.js';
import { findModel } from '../models/registry.js';
import type { SystemRequest } from '../models/types.js';
import { certify } from '../spectral/certify.js';
import { measureCost } from '../spectral/cost.js';
import { spectralMeasure } from '../spectral/measure.js';
import { modularCount } from '../spectral/modular-count.js';
import type { MeasuredPoint } from '../spectral/types.js';
import { answer } from '../statistics/answer.js';
import { answerCost } from '../statistics/cost.js';
import { cellId } from './identity.js';
import type { CellResult, EvaluateOptions, PointFailure, PointOutcome, PointSpec, PointTask } from './types.js';

/**
 * Computes the measure of a point, unless the task brings it, and answers the questions.
 * @param options.memory bytes one evaluation may use; a point that would need more is refused before it is built
 * @param clock milliseconds of any origin, e.g. `() => performance.now()`; without it the seconds are 0
 */
export function evaluatePoint(task: PointTask, options: EvaluateOptions, clock: () => number = () => 0): PointOutcome {
  const start = clock();
  let measured = task.stored;
  if (measured === null) {
    try {
      measured = measure(task.spec, options.memory);
    } catch (error) {
      const kernel = (clock() - start) / 1000;
      return { point: null, cells: [], failure: failureOf(task, error), seconds: { kernel, statistics: 0 } };
    }
  }
  const between = clock();
  const { cells, failure } = answers(task, measured, options.memory);
  return {
    point: task.stored === null ? { id: task.id, spec: task.spec, measured } : null,
    cells,
    failure,
    seconds: { kernel: (between - start) / 1000, statistics: (clock() - between) / 1000 },
  };
}

/** The request that a stored spec stands for. */
export function requestOf(spec: PointSpec): SystemRequest {
  const { size, coupling, parameters, disorder, prepared, detected } = spec;
  return { size, coupling, parameters, disorder, prepared, detected };
}

function measure(spec: PointSpec, memory: number): MeasuredPoint {
  const family = findModel(spec.model);
  const request = requestOf(spec);
  const extent = family.extent(request);
  limit(measureCost(extent).bytes, memory, `a Hamiltonian of dimension ${extent.dimension}`);
  const system = family.build(request);
  const measured = spectralMeasure(system);
  return spec.certify === true ? certify(measured, modularCount(family, request, system)) : measured;
}

function answers(
  task: PointTask,
  measured: MeasuredPoint,
  memory: number,
): { readonly cells: readonly CellResult[]; readonly failure: PointFailure | null } {
  const cells: CellResult[] = [];
  let failure: PointFailure | null = null;
  const levels = measured.measure.energies.length;
  for (const { id, ordinal, question } of task.questions) {
    try {
      limit(answerCost(levels, question).bytes, memory, `the statistics of ${levels} levels`);
      cells.push({ id: cellId(task.id, id), pointId: task.id, questionId: id, fields: answer(measured, question) });
    } catch (error) {
      failure ??= failureOf(task, error, `question ${ordinal} (${question.schedule.family}): `);
    }
  }
  return { cells, failure };
}

function limit(needed: number, allowed: number, what: string): void {
  if (needed <= allowed) return;
  throw new WindrowError('point.too-large', `${what} needs ${megabytes(needed)}, more than the limit of ${megabytes(allowed)}`, {
    found: `${needed} bytes`,
    allowed: `${allowed} bytes`,
  });
}

const megabytes = (bytes: number): string => `${Number((bytes / 1e6).toPrecision(3))} MB`;

function failureOf(task: PointTask, error: unknown, prefix = ''): PointFailure {
  const reason = (code: ErrorCode, message: string): PointFailure => ({
    id: task.id,
    spec: task.spec,
    code,
    message: `${prefix}${message}`,
  });
  if (error instanceof WindrowError) {
    const { found, allowed } = error.details;
    const detail = [found === undefined ? [] : [`found ${found}`], allowed === undefined ? [] : [`allowed ${allowed}`]].flat();
    return reason(error.code, detail.length === 0 ? error.message : `${error.message} (${detail.join(', ')})`);
  }
  // An allocation that fails comes as a RangeError, and is a matter of size; so is a stack that runs out, but that is a fault.
  if (error instanceof RangeError && /allocation|array length|buffer/i.test(error.message)) return reason('point.too-large', error.message);
  return reason('internal.invariant', error instanceof Error ? `${error.name}: ${error.message}` : String(error));
}
