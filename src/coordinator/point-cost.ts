/**
 * What a point costs before anything is built: the sum of its measure, unless that is stored, and its open questions.
 *
 * An estimate sizes jobs and lanes; it never decides whether a point is computed. A point that cannot even be estimated therefore costs
 * nothing here and fails where it is evaluated, with its reason.
 */
import { WindrowError } from '../core/errors.js';
import { findModel } from '../models/registry.js';
import { measureCost } from '../spectral/cost.js';
import { answerCost } from '../statistics/cost.js';
import type { PointSpec, QuestionRecord } from '../sweep/types.js';
import type { PointCost } from './bundler.js';

export function pointCost(spec: PointSpec, measured: boolean, open: readonly QuestionRecord[]): PointCost {
  try {
    const extent = findModel(spec.model).extent(spec);
    const measure = measureCost(extent);
    const answers = open.map(({ question }) => answerCost(extent.dimension, question));
    return {
      memory: Math.max(measured ? 0 : measure.bytes, ...answers.map(({ bytes }) => bytes)),
      operations: answers.reduce((sum, { flops }) => sum + flops, measured ? 0 : measure.flops),
    };
  } catch (error) {
    if (error instanceof WindrowError) return { memory: 0, operations: 0 };
    throw error;
  }
}
