/**
 * Result rows of the two-level system from closed forms, without any room of the program that computes.
 *
 * H = −g σx + (b/2) σz, prepared and detected in the state of σz = +1, measured at a fixed interval τ. Levels ±Ω with
 * Ω = √(g² + b²/4), weights (1 ± (b/2)/Ω)/2, so Σ w² = (1 + b²/(b² + 4g²))/2. For b = 0 the return has S_n = sin²(gτ) cos^{2(n−1)}(gτ)
 * for n ≥ 1 and E[min(n, K)] = 2 − cos^{2(K−1)}(gτ). Elementary; the second is
 * a sum over the first-detection probabilities of Quantum walks: the first detected passage time problem, Phys. Rev. E 95, 032141 (2017),
 * DOI 10.1103/PhysRevE.95.032141 (from memory).
 */
import type { CellRow } from '../../src/store/types.js';
import type { CellFields, Question } from '../../src/statistics/types.js';
import type { Flag, PointFields } from '../../src/spectral/types.js';

export const TWO_LEVEL_QUESTION: Question = {
  schedule: { family: 'fixed', interval: 0.3 },
  resolution: { energy: 'auto', weight: 'auto' },
  budget: 20,
  detector: { efficiency: 1 },
  sampling: null,
};

export const PLAIN_POINT: PointFields = {
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
  measure_residual: 0,
  method: 'closed-form',
  flags: [],
  flag_reasons: [],
};

export const PLAIN_CELL: CellFields = {
  recurrent_weight: 0.5,
  decaying_weight: 0.5,
  decay_rate: null,
  settling_measurements: null,
  winding_number: 2,
  winding_low: 2,
  winding_high: 2,
  resolution_energy: 1 / 6,
  resolution_weight: 0.05,
  detection_probability: 1,
  mean_measurements: 2,
  variance_measurements: 1,
  mean_time: 0.6,
  capped_mean: 2,
  detected_in_budget: 1,
  median_measurements: 1,
  p90_measurements: 3,
  sampled_winding: null,
  sampled_winding_error: null,
  sampled_draws: null,
  sampled_seed: null,
  flags: [],
  flag_reasons: [],
};

export interface RowChange {
  readonly coupling: number;
  readonly size?: number;
  readonly ordinal?: number;
  readonly coordinates?: { readonly [axis: string]: number | string };
  readonly point?: Partial<PointFields>;
  readonly cell?: Partial<CellFields>;
  readonly question?: Question;
  readonly questionOrdinal?: number;
  readonly flags?: readonly Flag[];
  readonly state?: 'computed' | 'failed' | 'missing';
}

/** A computed row unless told otherwise. */
export function cellRow(change: RowChange): CellRow {
  const size = change.size ?? 2;
  const ordinal = change.ordinal ?? 0;
  const questionOrdinal = change.questionOrdinal ?? 0;
  const computed = (change.state ?? 'computed') === 'computed';
  return {
    ordinal,
    coordinates: { size, coupling: change.coupling, ...change.coordinates },
    pointId: ordinal.toString(16).padStart(64, '0'),
    cellId: computed ? (1000 * (questionOrdinal + 1) + ordinal).toString(16).padStart(64, '0') : null,
    spec: {
      model: 'two-level',
      size,
      coupling: change.coupling,
      parameters: { bias: 0 },
      disorder: null,
      prepared: 'up',
      detected: 'same',
    },
    question: change.question ?? TWO_LEVEL_QUESTION,
    questionOrdinal,
    point: computed ? { ...PLAIN_POINT, ...change.point } : null,
    fields: computed
      ? { ...PLAIN_CELL, ...change.cell, flags: change.flags ?? [], flag_reasons: (change.flags ?? []).map((flag) => `marked ${flag}`) }
      : null,
    failure: change.state === 'failed' ? { code: 'point.too-large', message: 'needs 9 GB, allowed 1 GB' } : null,
  };
}

/** Σ w² of the biased two-level system. */
export function recurrentWeight(coupling: number, bias: number): number {
  return (1 + bias ** 2 / (bias ** 2 + 4 * coupling ** 2)) / 2;
}

export function cappedMean(coupling: number, interval: number, budget: number): number {
  return 2 - Math.cos(coupling * interval) ** (2 * (budget - 1));
}

export function twoLevelRows(couplings: readonly number[], bias: number): CellRow[] {
  const { interval } = TWO_LEVEL_QUESTION.schedule as unknown as { interval: number };
  return couplings.map((coupling, ordinal) => {
    const weight = recurrentWeight(coupling, bias);
    return cellRow({
      coupling,
      ordinal,
      cell: {
        recurrent_weight: weight,
        decaying_weight: 1 - weight,
        capped_mean: cappedMean(coupling, interval, TWO_LEVEL_QUESTION.budget),
      },
    });
  });
}

export function range(from: number, to: number, count: number): number[] {
  return Array.from({ length: count }, (_, index) => from + ((to - from) * index) / (count - 1));
}
