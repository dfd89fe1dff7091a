/** The contract of a schedule family: independent intervals τ_1, τ_2, … with one distribution. Times are in the inverse energy unit. */
import type { z } from 'zod';
import type { RandomStream } from '../core/random.js';

/** A schedule as identified: the family and its own parameters, flat, all numbers resolved, defaults filled in. */
export type ScheduleSpec = { readonly family: string } & { readonly [parameter: string]: number | string | readonly number[] };

export interface IntervalDistribution {
  /** False for one fixed interval (stroboscopic); the statistics then use the renewal equation and phases. */
  readonly random: boolean;
  readonly mean: number;
  readonly variance: number;
  /** One interval ≥ 0. */
  sample(stream: RandomStream): number;
  /**
   * 1 − χ(x), χ(x) = E[exp(−i x τ)], written to out[0] (real) and out[1] (imaginary part). Accurate to a few ulp relative to |1 − χ|
   * also where χ → 1, so that near-resonant pairs keep their digits.
   */
  complement(x: number, out: Float64Array): void;
  /** Spacing a of a lattice distribution (all intervals in offset + a·Z, so |χ| = 1 at 2π/a), null otherwise. */
  readonly lattice: number | null;
}

export interface ScheduleFamily<P = unknown> {
  readonly name: string;
  readonly summary: string;
  /** χ(x) in plain text. */
  readonly characteristic: string;
  readonly source: string;
  /** A strict zod object without `family` and `dead-time`; every parameter has a description. Keys are as written in a sweep file. */
  readonly parameters: z.ZodType<P>;
  build(parameters: P): IntervalDistribution;
}
