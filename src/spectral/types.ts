/** The spectral measure of a pair of states, and what is said about it. Field names are those of SQL, CSV and JSON. */

/**
 * (E_j, v_j, q_j) over the bright levels, energies ascending and distinct.
 * v_j = <φ|P_j|φ>, q_j = <φ|P_j|ψ>. For the return problem (φ = ψ) `overlapRe` is `weights` itself and `overlapIm` is null.
 */
export interface SpectralMeasure {
  readonly energies: Float64Array;
  readonly weights: Float64Array;
  readonly overlapRe: Float64Array;
  readonly overlapIm: Float64Array | null;
}

/** Why a number must not be taken at face value. */
export type Flag = 'doubtful' | 'underresolved' | 'resolution-sensitive' | 'uncertified';

export interface PointFields {
  readonly hilbert_dimension: number;
  readonly sector_dimension: number;
  readonly accessible_dimension: number;
  readonly accessible_by: 'weights' | 'structure' | 'modular';
  readonly bright_levels: number;
  readonly effective_dimension: number;
  readonly mean_energy: number;
  readonly energy_variance: number;
  /** null with one level */
  readonly smallest_gap: number | null;
  /** null below three levels */
  readonly gap_ratio: number | null;
  readonly measure_residual: number;
  /** How the measure was computed, e.g. 'tridiagonal-ql', 'lanczos-ql', 'householder-ql'. */
  readonly method: string;
  readonly flags: readonly Flag[];
  /** One sentence per flag. */
  readonly flag_reasons: readonly string[];
}

export interface MeasuredPoint {
  readonly measure: SpectralMeasure;
  readonly fields: PointFields;
  /** <φ|ψ>, complex. For the return problem 1. */
  readonly overlap: readonly [number, number];
}
