/** Results to store: of the right form and with recognisable numbers. Not physics. */
import { createHash } from 'node:crypto';
import type { MeasuredPoint, PointFields, SpectralMeasure } from '../../src/spectral/types.js';
import type { CellFields, Question } from '../../src/statistics/types.js';
import type { CellResult, GridPoint, PointFailure, PointResult, PointSpec, QuestionRecord } from '../../src/sweep/types.js';
import type { NewSweep } from '../../src/store/types.js';

export const idOf = (...labels: readonly unknown[]): string => createHash('sha256').update(JSON.stringify(labels)).digest('hex');

export const specOf = (label: number | string): PointSpec => ({
  model: 'two-level',
  size: 2,
  coupling: typeof label === 'number' ? label : 0.5,
  parameters: { bias: 0, label },
  disorder: null,
  prepared: 'left',
  detected: 'same',
});

export const gridPoint = (ordinal: number, label: number | string = ordinal): GridPoint => ({
  id: idOf('point', label),
  ordinal,
  spec: specOf(label),
  coordinates: { coupling: ordinal / 7, prepared: `state ${String(label)}` },
});

export const questionRecord = (ordinal: number, label: number | string = ordinal): QuestionRecord => ({
  id: idOf('question', label),
  ordinal,
  question: {
    schedule: { family: 'exponential', mean: 0.25 + ordinal },
    resolution: { energy: 'auto', weight: 1e-3 },
    budget: 2000,
    detector: { efficiency: 1 },
    sampling: null,
  } satisfies Question,
});

export const sweepOf = (name: string, points: number, questions: readonly QuestionRecord[]): NewSweep => ({
  name,
  digest: idOf('sweep', name, points, questions),
  document: { name, model: 'two-level', 'a "quoted" key': ['\\', "'", 1e-300, 12.5] },
  methodVersion: 'test',
  points,
  questions,
});

export const pointFields = (fields: Partial<PointFields> = {}): PointFields => ({
  hilbert_dimension: 2,
  sector_dimension: 2,
  accessible_dimension: 2,
  accessible_by: 'weights',
  bright_levels: 2,
  effective_dimension: 2,
  mean_energy: 0,
  energy_variance: 1,
  smallest_gap: 2,
  gap_ratio: null,
  measure_residual: 1e-16,
  method: 'tridiagonal-ql',
  flags: [],
  flag_reasons: [],
  ...fields,
});

export const cellFields = (fields: Partial<CellFields> = {}): CellFields => ({
  recurrent_weight: 0.5,
  decaying_weight: 0.5,
  decay_rate: 0.1,
  settling_measurements: 12,
  winding_number: 2,
  winding_low: 2,
  winding_high: 2,
  resolution_energy: 0.002,
  resolution_weight: 0.0005,
  detection_probability: 1,
  mean_measurements: 2,
  variance_measurements: 1.5,
  mean_time: 0.5,
  capped_mean: 2,
  detected_in_budget: 1,
  median_measurements: 1,
  p90_measurements: 4,
  sampled_winding: null,
  sampled_winding_error: null,
  sampled_draws: null,
  sampled_seed: null,
  flags: [],
  flag_reasons: [],
  ...fields,
});

/** A return problem: overlaps are the weights. */
export function returnMeasure(energies: readonly number[], weights: readonly number[]): SpectralMeasure {
  const array = Float64Array.from(weights);
  return { energies: Float64Array.from(energies), weights: array, overlapRe: array, overlapIm: null };
}

export const measured = (measure = returnMeasure([-1, 1], [0.5, 0.5]), fields: Partial<PointFields> = {}): MeasuredPoint => ({
  measure,
  fields: pointFields(fields),
  overlap: [1, 0],
});

export const pointResult = ({ id, spec }: Pick<GridPoint, 'id' | 'spec'>, content = measured()): PointResult => ({
  id,
  spec,
  measured: content,
});

export const cellResult = (
  point: { readonly id: string },
  question: { readonly id: string },
  fields: Partial<CellFields> = {},
): CellResult => ({
  id: idOf('cell', point.id, question.id),
  pointId: point.id,
  questionId: question.id,
  fields: cellFields(fields),
});

export const failureOf = ({ id, spec }: Pick<GridPoint, 'id' | 'spec'>, message = 'needs 12 GB'): PointFailure => ({
  id,
  spec,
  code: 'point.too-large',
  message,
});
