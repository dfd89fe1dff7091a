/** What is asked of a measure and what is answered. Field names are those of SQL, CSV and JSON; definitions stand in the docstrings of each statistic. */
import type { Flag } from '../spectral/types.js';
import type { ScheduleSpec } from '../schedules/types.js';

/** One question put to a spectral measure; identified by its content, so defaults are always filled in. */
export interface Question {
  readonly schedule: ScheduleSpec;
  /** 'auto' is what the budget can show: energy 1/(K·<τ>), weight 1/K. */
  readonly resolution: { readonly energy: 'auto' | number; readonly weight: 'auto' | number };
  /** K, number of measurements. */
  readonly budget: number;
  readonly detector: { readonly efficiency: number };
  /** Drawn schedules besides the exact averages; null for none. */
  readonly sampling: { readonly draws: number; readonly seed: number } | null;
}

export interface CellFields {
  readonly recurrent_weight: number;
  readonly decaying_weight: number;
  /** per measurement; Infinity is stored as null with no decaying pair */
  readonly decay_rate: number | null;
  readonly settling_measurements: number | null;
  readonly winding_number: number;
  readonly winding_low: number;
  readonly winding_high: number;
  /** the resolution that was used, in energy units and as a weight */
  readonly resolution_energy: number;
  readonly resolution_weight: number;
  readonly detection_probability: number;
  readonly mean_measurements: number | null;
  readonly variance_measurements: number | null;
  readonly mean_time: number | null;
  readonly capped_mean: number;
  readonly detected_in_budget: number;
  readonly median_measurements: number | null;
  readonly p90_measurements: number | null;
  readonly sampled_winding: number | null;
  readonly sampled_winding_error: number | null;
  readonly sampled_draws: number | null;
  readonly sampled_seed: number | null;
  readonly flags: readonly Flag[];
  readonly flag_reasons: readonly string[];
}
