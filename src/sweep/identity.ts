/**
 * Identities: what is asked, digested. The same question asked twice is one row, and a different way of computing is a different row.
 *
 * An id is the SHA-256 of the canonical JSON (RFC 8785) of the content with the method version. It depends on nothing else: not on the
 * sweep, the order of keys, the format of the file or the machine.
 */
import { digest, type Json } from '../core/json.js';
import { defaultKernel } from '../linalg/default-kernel.js';
import type { Question } from '../statistics/types.js';
import type { PointSpec } from './types.js';

/**
 * Names the numerics: their version, which changes whenever stored numbers would change by more than rounding, and the build of the
 * kernels that runs here, as builds differ in the last digits. Workers of one sweep have the same.
 */
export const METHOD_VERSION = `w2-${defaultKernel.name}`;

/** Id of a point: one Hamiltonian with its two states. */
export function pointId(spec: PointSpec): string {
  return digest({ method: METHOD_VERSION, point: spec as unknown as Json });
}

/** Id of a question: schedule, resolution, budget, detector, sampling. */
export function questionId(question: Question): string {
  return digest({ method: METHOD_VERSION, question: question as unknown as Json });
}

/** Id of a cell: a point under one question. */
export function cellId(point: string, question: string): string {
  return digest({ method: METHOD_VERSION, point, question });
}
