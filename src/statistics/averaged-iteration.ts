/**
 * The averaged monitored step (averaged.ts), in units where it is cheapest: elements r_ij stand for R_ij/(t_i t_j), t_i² = v_i. There a
 * measurement turns r into r_ij − c_i − c_j*, c = κû − κ²s/2, û = (X∘R)t in units of t_i and s = t†(X∘R)t. One pass over half of the
 * matrix applies the last measurement, the next interval and gathers û. Of both forms, O(n²) operations a step and 16n² bytes.
 */
import type { IntervalDistribution } from '../schedules/types.js';
import type { SpectralMeasure } from '../spectral/types.js';

export interface AveragedIteration {
  /** Moves on by an interval and a measurement without a click; returns s, the probability that a perfect detector had clicked. */
  step(): number;
  /** tr R */
  remaining(): number;
  /** Gives back what the iteration holds; nothing may be called after it. Leaving it out costs time, not memory. */
  close(): void;
}

/** @param kappa amplitude reduction κ of a measurement without a click */
export type OpenIteration = (measure: SpectralMeasure, distribution: IntervalDistribution, kappa: number) => AveragedIteration;

/** Prepared state in units of t: a_i/t_i = q_i/v_i. */
export function preparedInUnits({ weights, overlapRe, overlapIm }: SpectralMeasure): {
  readonly re: Float64Array;
  readonly im: Float64Array;
} {
  return {
    re: overlapRe.map((value, i) => value / weights[i]),
    im: overlapIm?.map((value, i) => value / weights[i]) ?? new Float64Array(weights.length),
  };
}
